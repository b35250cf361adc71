import json
import math
from itertools import pairwise

import pytest
from hypothesis import HealthCheck, given, settings, strategies as st

from diskwatch import analyser
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import Settled
from diskwatch.trends.norms import NORMS, STREAM_OF
from tests.history.years import upkept
from tests.samples import DAY, NOON
from tests.ticket.lives import a_ticket, days, live, opened
from tests.ticket.recursion import evidence


def _close(one, other):
    return math.isclose(one, other, rel_tol=1e-9, abs_tol=1e-9)


def _read_again(ticket):
    """As whoever gets it reads it: text alone, no history."""
    return json.loads(json.dumps(ticket))


def _by_stream(ticket):
    return {one["stream"]: one for one in _read_again(ticket)["ledgers"]}


def test_the_evidence_of_a_count_finding_can_be_worked_out_again_from_the_ticket_alone(folder):
    rising = (3, 20, 40, 60, 80)
    passes = days(90, lambda day: {"crc_errors": sum(day >= one for one in rising)})
    with opened(folder, passes) as past:
        ticket = _read_again(a_ticket(past, NOON + 90 * DAY))
    (finding,) = [one for one in ticket["findings"] if one["kind"] == "drift"]
    link = _by_stream(ticket)["link"]
    assert {way["of"] for way in link["ways"]} == {"now", finding["name"]}
    for way in link["ways"]:
        goal = link["evidence_days"] if way["of"] == "now" else finding["evidence_days"]
        assert _close(evidence(link, way), goal)
    assert link["evidence_days"] != finding["evidence_days"] or link["evidence_days"] > link["alarms_at_days"]


def test_a_finding_that_stands_though_its_evidence_fell_long_ago_can_still_be_worked_out(folder):
    rising = (3, 12, 21, 30)
    passes = days(400, lambda day: {"command_timeouts": sum(day >= one for one in rising)}, a_day=1)
    with History.open(folder) as history:
        live(history, passes)
        upkept(history, NOON + 400 * DAY)
    with Past.open(folder) as past:
        assert past.exact_from(1) > NOON + 200 * DAY, "nothing was thinned"
        ticket = _read_again(a_ticket(past, NOON + 400 * DAY))
    timeouts = _by_stream(ticket)["timeouts"]
    (finding,) = [one for one in ticket["findings"] if one["name"] == "drift:timeouts"]
    assert timeouts["evidence_days"] < timeouts["alarms_at_days"] <= finding["evidence_days"]
    (way,) = [one for one in timeouts["ways"] if one["of"] == "drift:timeouts"]
    assert way["steps"]
    assert _close(evidence(timeouts, way), finding["evidence_days"])


def test_after_the_owners_word_a_ledger_is_told_from_where_it_began_anew(folder):
    rising = (3, 20, 40, 60, 90, 100, 110, 120, 130, 140)
    passes = tuple(days(160, lambda day: {"crc_errors": sum(day >= one for one in rising)}, a_day=1))
    word = Settled(at=passes[80].at - 60, because="a new cable", signals=("crc-errors",))
    with opened(folder, passes, words={80: word}) as past:
        ticket = _read_again(a_ticket(past, NOON + 160 * DAY))
    link = _by_stream(ticket)["link"]
    (finding,) = [one for one in ticket["findings"] if one["name"] == "drift:link"]
    assert link["powered_days"] == 80, "it began anew with the word"
    (way,) = [one for one in link["ways"] if one["of"] == "drift:link"]
    assert way["steps"]
    assert _close(evidence(link, way), finding["evidence_days"])


@settings(max_examples=10, deadline=None, suppress_health_check=list(HealthCheck))
@given(
    rises=st.lists(st.tuples(st.integers(0, 29), st.sampled_from(sorted(STREAM_OF))), max_size=12),
    off=st.sets(st.integers(1, 29), max_size=12),
)
def test_every_way_leads_to_what_the_analyser_came_to(tmp_path_factory, rises, off):
    names = ("pending-sectors", "crc-errors", "command-timeouts", *{name for _, name in rises})

    def counted(day):
        return {
            name.replace("-", "_"): sum(name == one and when <= day for when, one in rises) for name in names
        }

    passes = tuple(days(30, counted, off=lambda day: day in off))
    with opened(tmp_path_factory.mktemp("life") / "state", passes) as past:
        state = analyser.load(past.state(1) or "")
        ledgers = _by_stream(a_ticket(past, NOON + 30 * DAY))
    assert ledgers.keys() == state.streams.keys()
    for norm in NORMS:
        if norm.stream in ledgers:
            ledger = ledgers[norm.stream]
            assert _close(ledger["evidence_days"], state.streams[norm.stream].ledger.evidence)
            for way in ledger["ways"]:
                assert _close(evidence(ledger, way), way["evidence_days"])
            told = [one for one in ledger["ways"] if one["of"] == "now"]
            assert told[0]["steps"], "the way is told, not only its end"


def test_days_that_are_alike_are_told_as_one_step(folder):
    with opened(folder, days(6, lambda _day: {"crc_errors": 0})) as past:
        ledger = _by_stream(a_ticket(past, NOON + 6 * DAY))["link"]
    (way,) = ledger["ways"]
    assert sum(step["days"] for step in way["steps"]) <= 6
    assert len(way["steps"]) == 1
    assert all(one["day"] < two["day"] for one, two in pairwise(way["steps"]))


def test_a_state_that_cannot_be_read_is_told_as_such(folder):
    with opened(folder, days(3, lambda _day: {"crc_errors": 0})) as past:
        at = NOON + 3 * DAY
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(Past, "state", lambda _self, _drive: "no state")
            ticket = a_ticket(past, at)
    assert ticket["ledgers"] is None
    assert "ledgers" in {one["member"] for one in ticket["not_known"]}
