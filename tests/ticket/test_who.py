from dataclasses import replace

from diskwatch.history.proof import Plugged
from diskwatch.records import SignalNow
from diskwatch.records.owner import OwnerFacts
from diskwatch.ticket.who import drive_part, host_part, moves_part, owner_part
from tests.samples import NOON
from tests.ticket.lives import HOST
from tests.ticket.test_cautions import LINE


def test_the_drive_is_told_with_its_powered_age():
    hours = SignalNow(name="power-on-hours", value=900, unit="hours", since=NOON, evidence=None)
    told = drive_part(replace(LINE, signals=(hours,))).value
    assert isinstance(told, dict)
    assert (told["serial"], told["wwn"], told["kind"]) == ("INV0001", "naa.5f00d00000000001", "hdd")
    assert told["power_on_hours"] == 900
    assert told["identity_is_weak"] is False


def test_what_the_owner_said_is_told_and_silence_has_its_reason():
    assert owner_part(LINE).value is None
    told = owner_part(replace(LINE, label="attic", owner=OwnerFacts(warranty_until="2027-05-31"))).value
    assert isinstance(told, dict)
    assert (told["label"], told["warranty_until"], told["asset"]) == ("attic", "2027-05-31", None)


def test_the_machine_is_told_and_its_users_are_not():
    assert "marigold" not in str(host_part(HOST))
    assert host_part(HOST).value == {
        "host": "studio-box.example",
        "system": "Linux",
        "kernel": "6.1.0-invented",
        "architecture": "x86_64",
    }


def test_moves_are_told_in_order():
    told = moves_part(
        (Plugged(since=0, device="/dev/sda", bay=None), Plugged(since=60, device="/dev/sdb", bay="2"))
    )
    assert told.value == [
        {"since": "1970-01-01T00:00:00Z", "device": "/dev/sda", "bay": None},
        {"since": "1970-01-01T00:01:00Z", "device": "/dev/sdb", "bay": "2"},
    ]
