from dataclasses import replace

from diskwatch.records import DriveLine, Identity
from tests.samples import HDD, HERE, NOON


def test_a_person_calls_a_drive_by_its_label_else_its_model_else_its_device():
    line = DriveLine(
        number=1, drive=HDD, place=HERE, label="archive", first_seen=NOON, last_pass=None, call=None
    )
    nameless = replace(HDD, identity=Identity(wwn=None, model=None, serial=None, path="/dev/sda"))
    assert line.name == "archive"
    assert replace(line, label=None).name == HDD.identity.model
    assert replace(line, label=None, drive=nameless).name == "/dev/sda"
