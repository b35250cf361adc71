import json

import pytest

from diskwatch.ticket.consistency import loose_ends
from diskwatch.ticket.page import page
from diskwatch.ticket.schema import schema
from tests.ticket.golden import SCENARIOS, drawn, path_of
from tests.ticket.recursion import evidence
from tests.ticket.test_document import sound, undescribed


@pytest.mark.parametrize("scenario", SCENARIOS)
def test_a_ticket_of_every_scenario_is_kept_and_stays_valid(scenario):
    told = sound(json.loads(path_of(scenario).read_text(encoding="utf-8")))
    assert list(loose_ends(told)) == []
    assert list(undescribed(told, dict(schema()))) == []
    assert "INVENTED" in page(told)
    for ledger in told["ledgers"]:
        for way in ledger["ways"]:
            assert evidence(ledger, way) == pytest.approx(way["evidence_days"], rel=1e-9, abs=1e-9)
            assert way["of"] == "now" or way["steps"]


def test_no_ticket_is_kept_of_a_scenario_that_is_gone():
    assert {path.stem for path in path_of("any").parent.glob("*.json")} == set(SCENARIOS)


@pytest.mark.bench
@pytest.mark.parametrize("scenario", SCENARIOS)
def test_a_ticket_drawn_now_asks_for_the_same_as_the_one_that_is_kept(scenario):
    kept = json.loads(path_of(scenario).read_text(encoding="utf-8"))
    now = sound(drawn(scenario))
    assert now.keys() >= kept.keys()
    assert (now["call"]["word"], now["asked_for"]) == (kept["call"]["word"], kept["asked_for"])
    assert {one["name"] for one in now["findings"]} == {one["name"] for one in kept["findings"]}
