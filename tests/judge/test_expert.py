from diskwatch.judge.expert import expert_line
from diskwatch.records import CallWord, Cause, Finding, FindingKind
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, read


def leading(*passes):
    return lived(*passes)[-1].findings[0]


def test_a_drift_tells_its_rule_its_signals_its_evidence_and_the_norm():
    found = leading(*(read(NOON + day * DAY, crc_errors=day // 10) for day in range(60)))
    told = expert_line(found)
    assert told.startswith("drift:link/1; signals crc-errors")
    assert f"M {found.evidence:.6g} of {found.data['threshold']:.6g} d" in told
    assert "episodes 5" in told
    assert told.endswith("norm 2/y; share 0.1")


def test_a_first_defect_tells_what_each_counter_was_and_is():
    found = leading(read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=8))
    assert expert_line(found) == "fact:first-defect/2; signals pending-sectors; pending-sectors first 0 now 8"


def test_what_is_not_known_is_said_and_never_nought():
    found = Finding(
        name="drift:read-latency",
        kind=FindingKind.DRIFT,
        signals=("read-latency",),
        since=NOON,
        calls=CallWord.LOOK,
        cause=Cause.UNCLEAR,
        evidence=40_000.0,
        sentence="!",
        data={"times": 1.5, "follows_heat": False, "onset_day": None},
    )
    assert expert_line(found) == (
        "drift:read-latency/1; signals read-latency; M 40000 d; times 1.5; follows_heat no; onset_day not known"
    )


def test_every_number_behind_a_finding_stands_in_its_line():
    found = leading(
        read(NOON, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, pending_sectors=400, reallocated_sectors=400),
    )
    told = expert_line(found)
    assert found.data
    assert all(name in told for name in found.data)
