from dataclasses import replace

from diskwatch.records import FindingKind
from diskwatch.ticket.thought import call_part, findings_part, told_finding
from tests.history.examples import a_call, a_finding
from tests.ticket.test_cautions import LINE


def test_the_call_is_told_with_cause_rule_and_evidence():
    told = call_part(replace(LINE, call=a_call(rule="drift:media"))).value
    assert isinstance(told, dict)
    assert (told["word"], told["cause"], told["cause_second"], told["rule"]) == (
        "look",
        "media",
        "head",
        "drift:media",
    )
    assert told["evidence_days"] == 4_000.0


def test_a_drive_that_was_never_read_has_no_call_but_a_reason():
    assert call_part(replace(LINE, call=None)).reason


def test_a_drift_names_the_norm_that_it_was_held_against():
    told = told_finding(a_finding(data={"stream": "media"}))
    assert told["parameters"] == {
        "stream": "media",
        "norm_per_year": 0.5,
        "share": 0.2,
        "alarms_at_days": 9131.25,
        "guaranteed_at_days": 18262.5,
    }
    assert told_finding(a_finding(data={"stream": "nobody's"}))["parameters"] is None


def test_the_odds_rule_names_its_limits_and_a_fact_has_none():
    rule = told_finding(a_finding("rule:damage-copy", kind=FindingKind.RULE, evidence=None))
    assert rule["parameters"] == {"window_days": 14, "copy_at": 7, "retire_at": 11}
    assert told_finding(a_finding("fact:hot", kind=FindingKind.FACT))["parameters"] is None


def test_findings_stand_in_the_order_in_which_they_matter():
    line = replace(LINE, findings=(a_finding("one"), a_finding("two")))
    told = findings_part(line).value
    assert isinstance(told, list)
    assert [one["name"] for one in told] == ["one", "two"]
