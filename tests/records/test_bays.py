from dataclasses import replace

from diskwatch.records import Bays, DriveLine, Identity, LastPass, Outcome
from diskwatch.records.owner import OwnerFacts
from tests.samples import HDD, HERE, NOON


def test_a_person_calls_a_drive_by_its_label_else_its_model_else_its_device():
    line = DriveLine(
        number=1, drive=HDD, place=HERE, label="archive", first_seen=NOON, last_pass=None, call=None
    )
    nameless = replace(HDD, identity=Identity(wwn=None, model=None, serial=None, path="/dev/sda"))
    assert line.name == "archive"
    assert replace(line, label=None).name == HDD.identity.model
    assert replace(line, label=None, drive=nameless).name == "/dev/sda"


def test_a_replaced_drive_has_departed_until_it_is_met_again():
    line = DriveLine(number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None, call=None)
    replaced = replace(line, owner=OwnerFacts(replaced_by="INV0002", replaced_at=NOON + 10))

    def met(at, outcome):
        return replace(replaced, last_pass=LastPass(at=at, outcome=outcome, explanation=None)).departed

    assert not line.departed
    assert replaced.departed
    assert met(NOON + 10, Outcome.READ)
    assert met(NOON + 20, Outcome.ABSENT)
    assert not met(NOON + 20, Outcome.READ)
    assert not met(NOON + 20, Outcome.TIMED_OUT)


def test_all_drives_are_those_that_are_here_and_then_those_that_departed():
    here = DriveLine(number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None, call=None)
    gone = replace(here, number=2)
    assert Bays(at=NOON, watcher=None, drives=(here,), departed=(gone,)).every == (here, gone)
