from dataclasses import replace

import pytest

from diskwatch.machine.endings import Verdict
from diskwatch.machine.outcomes import of_words
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.reading import understood
from diskwatch.machine.ways import USB_TYPES, Ways, others, reaches
from diskwatch.records import Drive, Identity, Kind, Outcome, Place, Way
from tests.machine.recordings import FIXTURES, text_of

BEHIND_SAT = "Probable ATA device behind a SAT layer\nTry an additional '-d ata' or '-d sat' argument."
UNKNOWN = text_of(FIXTURES / "invented_usb_bridge_unknown" / "all.txt")
HDD = text_of(FIXTURES / "invented_hdd_failing" / "all.txt")
READ = Verdict(outcome=Outcome.READ)


def device(
    type_: str | None = None, *, kind: Kind = Kind.USB, instance: str = "1", adapter: str | None = "1f75:0621"
) -> Found:
    return Found(
        address=Address(node="/dev/sdx", type=type_),
        blocks=("sdx",),
        place=Place(device="/dev/sdx"),
        drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path="/dev/sdx"), kind=kind),
        instance=instance,
        adapter=adapter,
    )


def next_types(found: Found, type_: str | None, text: str, status: int = 2) -> tuple[str, ...]:
    lines = tuple(text.splitlines())
    what = understood(lines, None, type_=type_, path="/dev/sdx")
    return others(
        found,
        type_,
        lines,
        of_words(lines, status, what, expects_smart=True, kind=found.drive.kind, command="smartctl"),
        what,
    )


@pytest.mark.parametrize(
    ("asked", "better"),
    [("scsi", ("sat",)), ("megaraid,7", ("sat+megaraid,7",)), ("cciss,1", ("sat+cciss,1",)), ("sat", ())],
)
def test_an_ata_drive_that_was_asked_as_a_scsi_one_is_asked_again_through_sat(asked, better):
    assert next_types(device(asked, kind=Kind.SAS), asked, BEHIND_SAT) == better


def test_a_scsi_answer_of_the_vendor_ata_is_an_ata_drives_too():
    text = text_of(FIXTURES / "invented_sas_megaraid_failing" / "all.txt")
    changed = "\n".join(
        "Vendor:               ATA" if line.startswith("Vendor:") else line for line in text.splitlines()
    )
    assert next_types(device("scsi", kind=Kind.SAS), "scsi", changed) == ("sat",)
    assert next_types(device("scsi", kind=Kind.SAS), "scsi", text) == ()


def test_behind_an_unknown_adapter_every_type_is_tried_but_the_one_just_asked_with():
    assert next_types(device(kind=Kind.SAS), None, UNKNOWN, 1) == USB_TYPES
    assert next_types(device("sat"), "sat", "noise") == USB_TYPES[1:]


@pytest.mark.parametrize(
    ("adapter", "own"),
    [("174c:2362:0100", "sntasmedia"), ("152d:0583", "sntjmicron"), ("0bda:9210 00AB", "sntrealtek")],
)
def test_an_adapter_whose_maker_is_known_is_sent_no_command_of_another_maker(adapter, own):
    assert next_types(device(adapter=adapter), None, UNKNOWN, 1) == ("sat", "scsi", own)


def test_silence_of_a_usb_drive_is_no_proof_that_its_type_is_right():
    assert next_types(device("sat"), "sat", "Device is in SLEEP mode, exit(3)", 3) == USB_TYPES[1:]
    assert next_types(device("sat"), "sat", "Device is in STANDBY mode, exit(3)", 3) == ()


@pytest.mark.parametrize(
    "text", [HDD, HDD.replace("SMART support is: Enabled", "SMART support is: Disabled"), "Permission denied"]
)
def test_a_drive_that_was_reached_or_must_not_be_asked_is_asked_no_other_way(text):
    assert next_types(device(), None, text) == ()


def test_no_other_type_is_tried_on_a_drive_that_hangs_on_no_usb():
    assert next_types(device("sat", kind=Kind.HDD), "sat", "noise") == ()


def test_a_drive_that_says_it_is_in_standby_was_reached_and_a_silent_one_was_not():
    assert reaches(READ)
    assert reaches(Verdict(outcome=Outcome.ASLEEP))
    assert not reaches(Verdict(outcome=Outcome.ASLEEP, unproved=True))
    assert not reaches(Verdict(outcome=Outcome.NO_SMART))


def test_what_was_tried_out_holds_for_the_instance_and_for_the_next_behind_the_same_adapter():
    ways = Ways()
    ways.settled(device(), "sntrealtek")
    ways.failed(device())
    assert (ways.known(device()), ways.tried(device()), ways.proved(device())) == ("sntrealtek", True, True)
    again = device(instance="2")
    assert (ways.known(again), ways.tried(again), ways.proved(again)) == ("sntrealtek", False, False)
    assert ways.known(device(instance="2", adapter="174c:2362")) is None
    assert ways.known(device(instance="2", adapter=None)) is None


def test_where_no_type_works_it_is_not_tried_again_until_the_device_comes_anew():
    ways = Ways()
    ways.settled(device(), None)
    assert (ways.closed(device()), ways.tried(device()), ways.known(device())) == (True, True, None)
    assert not ways.closed(device(instance="2"))
    assert not ways.tried(device(instance="2"))


def test_a_type_that_smartctl_found_is_forgotten_when_it_fails():
    ways = Ways()
    ways.found_by_itself(device(), "sat")
    assert (ways.known(device()), ways.tried(device())) == ("sat", False)
    ways.failed(device())
    assert ways.known(device()) is None


def test_drives_behind_one_node_are_kept_apart():
    ways = Ways()
    seven, eight = device("megaraid,7", adapter=None), device("megaraid,8", adapter=None)
    ways.settled(replace(seven, blocks=()), "sat+megaraid,7")
    assert ways.known(eight) is None


def kept(type_: str | None, *, instance: str = "1") -> Way:
    return Way(adapter="1f75:0621", instance=instance, type=type_)


def test_the_same_device_as_before_a_restart_is_known_to_answer_to_its_type_and_may_be_tried_out_again():
    ways = Ways([kept("sat")])
    assert (ways.known(device()), ways.proved(device()), ways.tried(device())) == ("sat", True, False)
    assert ways.handed_down(device())
    ways.failed(device())
    assert (ways.known(device()), ways.proved(device()), ways.handed_down(device())) == (None, False, False)


def test_another_device_behind_the_same_adapter_has_its_type_proved_by_no_restart():
    ways = Ways([kept("sat", instance="0")])
    assert (ways.known(device()), ways.proved(device()), ways.handed_down(device())) == ("sat", False, True)


def test_a_device_that_no_type_reaches_stays_closed_over_a_restart_and_only_while_it_stays_plugged_in():
    ways = Ways([kept(None)])
    assert ways.closed(device())
    assert not ways.closed(device(instance="2"))
    assert ways.known(device(instance="2")) is None


def test_what_is_kept_but_is_no_type_is_not_believed():
    assert Ways([kept("sat; reboot"), kept("-s")]).known(device()) is None


def test_what_was_found_out_is_news_once_and_only_where_it_changes_something():
    ways = Ways()
    assert ways.news(device()) is None
    ways.found_by_itself(device(), "sat")
    assert (ways.news(device()), ways.news(device())) == (kept("sat"), None)
    ways.found_by_itself(device(), "sat")
    assert ways.news(device()) is None
    ways.settled(device(), None)
    assert ways.news(device()) == kept(None)
    ways.settled(device(adapter=None), "sat")
    assert ways.news(device(adapter=None)) is None


def test_what_is_news_brings_a_later_watch_to_the_same_knowledge():
    first = Ways()
    first.settled(device(), "sntrealtek")
    news = first.news(device())
    assert news is not None
    later = Ways([news])
    for found in (device(), device(instance="2")):
        assert later.known(found) == first.known(found)
        assert later.proved(found) == first.proved(found)
