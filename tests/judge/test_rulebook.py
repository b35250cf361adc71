import re
from pathlib import Path

import pytest

import diskwatch.analyser
import diskwatch.judge
from diskwatch.judge import rulebook
from diskwatch.judge.rulebook import RULES, rule_of
from diskwatch.records import CallWord
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, read

ROOMS = (Path(diskwatch.analyser.__file__).parent, Path(diskwatch.judge.__file__).parent)


def names():
    """Every name of a finding that stands in the code, without what is filled in."""
    for room in ROOMS:
        for path in sorted(room.glob("*.py")):
            if path.name != "rulebook.py":
                text = path.read_text(encoding="utf-8")
                yield from re.findall(r'"((?:fact|rule|drift|level):[a-z0-9-]+)', text)


def test_every_finding_that_the_code_can_name_has_a_rule():
    found = set(names())
    assert {"fact:first-defect", "rule:damage-copy", "level:odds", "fact:unreadable"} <= found
    for name in found:
        assert rule_of(name).version >= 1


def test_every_rule_is_about_something_that_the_code_can_name():
    found = {*names(), "quiet"}
    made_up = ("fact:attribute-5", "drift:media", "fact:self-assessment", "fact:spare", "fact:worn", "fact:hot")
    text = "".join(path.read_text(encoding="utf-8") for path in (ROOMS[1] / "facts.py",))
    for rule in RULES:
        short = rule.name.removeprefix("fact:").rstrip("-")
        assert any(one.startswith(rule.name) for one in (*found, *made_up)) or f'"{short}' in text, rule.name


def test_the_first_rule_that_fits_is_the_findings_own():
    assert rule_of("fact:worn").name == "fact:worn"
    assert rule_of("fact:worn-out").name == "fact:worn-out"
    assert rule_of("fact:attribute-197").name == "fact:attribute-"
    assert rule_of("drift:read-latency").name == "drift:"
    with pytest.raises(KeyError):
        rule_of("fact:rain")


def test_rules_have_names_of_their_own_and_tell_when_they_hold():
    assert len({rule.name for rule in RULES}) == len(RULES)
    for rule in RULES:
        assert rule.when
        assert rule.source
    assert rulebook.told("fact:attribute-5").startswith("fact:attribute-5/1: an attribute is at its threshold")


@pytest.mark.parametrize(
    "passes",
    [
        [read(NOON, self_assessment="failed")],
        [read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=1)],
        [
            read(NOON, pending_sectors=0, reallocated_sectors=0),
            read(NOON + DAY, pending_sectors=9, reallocated_sectors=0),
        ],
        [read(NOON, percentage_used=104, available_spare=80)],
        [read(NOON, available_spare=3, spare_threshold=10)],
        [read(NOON + day * DAY, crc_errors=day // 10) for day in range(40)],
        [read(NOON, temperature=80, warning_celsius=70)],
    ],
)
def test_a_call_is_one_that_its_rule_may_ask_for(passes):
    call = lived(*passes)[-1].call
    assert call.word in rule_of(call.rule).calls


def test_a_link_heat_or_power_finding_never_calls_for_a_new_drive():
    for name in ("drift:link", "fact:link-again", "fact:hot", "fact:warns-of-heat", "fact:power-shared"):
        assert rule_of(name).calls == {CallWord.LOOK}
