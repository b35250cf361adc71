from hypothesis import given, strategies as st

from diskwatch.judge import rules
from diskwatch.records import CallWord, Cause, Finding, FindingKind
from tests.samples import NOON

WORDS = st.sampled_from([None, *CallWord])


def finding(calls, *, name="fact:x", kind=FindingKind.FACT, cause=Cause.MEDIA, evidence=None, since=NOON):
    return Finding(
        name=name,
        kind=kind,
        signals=(),
        since=since,
        calls=calls,
        cause=cause,
        evidence=evidence,
        sentence=f"{name}!",
    )


def decide(*findings, before=None, at=NOON):
    return rules.decide(findings, before=before, at=at, quiet="Nothing.")


def test_nothing_standing_keeps_with_no_cause():
    call = decide()
    assert (call.word, call.cause, call.reason) == (CallWord.KEEP, None, "Nothing.")


@given(st.lists(WORDS, min_size=1, max_size=6), st.randoms())
def test_the_call_is_the_strongest_that_any_finding_asks_for_in_whatever_order_they_come(words, shuffler):
    findings = [finding(word, name=f"fact:{number}") for number, word in enumerate(words)]
    shuffled = list(findings)
    shuffler.shuffle(shuffled)
    strongest = max((word.rank for word in words if word), default=0)
    assert decide(*findings).word.rank == strongest
    assert decide(*shuffled) == decide(*findings)


def test_a_call_that_stays_the_same_keeps_its_date_and_a_new_one_gets_today():
    first = decide(finding(CallWord.LOOK))
    again = decide(finding(CallWord.LOOK), before=first, at=NOON + 99)
    worse = decide(finding(CallWord.COPY), before=again, at=NOON + 200)
    assert (again.at, worse.at) == (NOON, NOON + 200)


def test_only_a_ledger_alarm_gives_the_call_its_evidence():
    drift = finding(CallWord.LOOK, kind=FindingKind.DRIFT, evidence=27_000.0)
    assert decide(drift).evidence == 27_000
    assert decide(drift, finding(CallWord.COPY)).evidence is None


def test_the_runner_up_is_the_next_different_cause():
    call = decide(
        finding(CallWord.COPY, name="fact:a", cause=Cause.MEDIA),
        finding(CallWord.LOOK, name="fact:b", cause=Cause.MEDIA),
        finding(CallWord.LOOK, name="fact:c", cause=Cause.HEAT),
    )
    assert (call.cause, call.cause_second) == (Cause.MEDIA, Cause.HEAT)


def test_findings_about_the_moment_pass_and_all_others_last():
    assert not rules.lasting(finding(CallWord.LOOK, name="fact:hot"))
    assert rules.lasting(finding(CallWord.LOOK, name="fact:first-defect"))


def test_of_two_equal_calls_the_one_that_lasts_leads_before_the_one_that_passes():
    hot = finding(CallWord.LOOK, name="fact:hot", cause=Cause.HEAT, since=NOON)
    defect = finding(CallWord.LOOK, name="fact:first-defect", since=NOON + 60)
    assert rules.leading([hot, defect]) is defect
    assert decide(hot, defect).cause_second is Cause.HEAT
