import copy
import json

import pytest

from diskwatch.ticket.consistency import loose_ends, unchecked, worked_out
from tests.samples import DAY, NOON
from tests.ticket import recursion
from tests.ticket.lives import a_ticket, days, opened


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    rising = (3, 20, 40, 60, 80)
    passes = days(
        90,
        lambda day: {"crc_errors": sum(day >= one for one in rising), "command_timeouts": day // 30},
        off=lambda day: day in {30, 31, 32, 33},
    )
    with opened(tmp_path_factory.mktemp("made") / "state", passes) as past:
        return json.loads(json.dumps(a_ticket(past, NOON + 90 * DAY)))


def test_a_ticket_as_it_is_made_holds_together(made):
    assert made["findings"]
    assert len(made["watching"]["gaps"]) == 1
    assert list(loose_ends(made)) == []
    assert list(unchecked(made)) == []


def _finding(ticket, **change):
    ticket["findings"][0].update(change)


def _ledger(ticket):
    return next(one for one in ticket["ledgers"] if one["stream"] == "link")


def _step(ticket, **change):
    _ledger(ticket)["ways"][0]["steps"][0].update(change)


@pytest.mark.parametrize(
    ("change", "told"),
    [
        (lambda one: one["watching"].update(passes=7), "outcomes add up to"),
        (lambda one: one["watching"].update(days_read=10**6), "days, but only"),
        (lambda one: one.update(thinned={"events": 0, "changes": 5}), "the signals lack 0"),
        (lambda one: one["not_known"].append({"member": "drive", "reason": "?"}), "not_known names drive"),
        (lambda one: one["events"].reverse(), "events are not in order"),
        (lambda one: one["signals"][0]["latest"].update(value=999), "no change led to the latest value"),
        (lambda one: one["signals"][0]["changes"].reverse(), "are not in order"),
        (lambda one: one["watching"]["gaps"][0].update({"from": "2030-01-01T00:00:00Z"}), "before it begins"),
        (lambda one: _ledger(one).update(evidence_days=5.0), "not at 5"),
        (lambda one: _finding(one, evidence_days=123456.0), "not at 123456"),
        (lambda one: _finding(one, name="drift:other"), "which is not there"),
        (lambda one: _step(one, exposure=9.0), "the way to"),
        (lambda one: _ledger(one).update(norm_per_day=-1e6), "cannot be worked out"),
        (lambda one: _step(one, days=10**15), "more than 100,000 days"),
        (lambda one: _ledger(one)["ways"][0].update(sums=[]), "cannot be worked out"),
        (lambda one: _finding(one, calls="retire"), "what stands asks for retire"),
        (lambda one: one["call"].update(word="keep"), "asked_for does not follow"),
        (lambda one: one["call"].update(rule="quiet"), "is led by"),
        (lambda one: one.update(asked_for="Please send money."), "asked_for does not follow"),
    ],
)
def test_what_was_changed_is_named(made, change, told):
    changed = copy.deepcopy(made)
    change(changed)
    assert told in "\n".join(loose_ends(changed))


def test_a_call_by_rules_that_are_not_known_here_is_said_not_to_be_checked(made):
    changed = copy.deepcopy(made)
    changed["made_by"]["rules_version"] = 999
    changed["call"]["rule"] = "a rule of another day"
    assert list(loose_ends(changed)) == []
    (told,) = unchecked(changed)
    assert "version 999" in told


def test_evidence_is_worked_out_as_by_the_independent_reading_of_the_schema(made):
    for ledger in made["ledgers"]:
        for way in ledger["ways"]:
            assert worked_out(ledger, way) == pytest.approx(recursion.evidence(ledger, way), rel=1e-12)
