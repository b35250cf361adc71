from dataclasses import replace

import pytest

from diskwatch.dashboard.words import cause, device, holdings, kind, name, reason
from diskwatch.records import CallWord, Kind, LastPass, Outcome, Place
from tests.dashboard.drives import COPY, KEEP, NOW, RETIRE, UNREAD, VIRTUAL, called


def test_the_owners_name_goes_before_the_model():
    assert name(RETIRE) == "Photos"
    assert name(COPY) == "INVENTED RX-4000"


def test_where_there_is_room_the_model_stands_beside_the_label():
    assert name(RETIRE, roomy=True) == "Photos (INVENTED RX-12000)"


def test_a_nameless_drive_is_called_by_its_device():
    assert name(UNREAD) == "sde"


def test_the_folder_of_all_devices_is_left_out():
    assert device(KEEP) == "nvme0n1"
    assert device(replace(KEEP, place=Place(device="/dev/bus/0 megaraid,7"))) == "bus/0 megaraid,7"


def test_every_kind_has_a_word():
    words = {kind(replace(KEEP, drive=replace(KEEP.drive, kind=each))) for each in Kind}
    assert len(words) == len(Kind)


def test_peoples_own_places_go_before_those_that_start_the_machine():
    assert holdings(KEEP, 40) == "/, /home, /boot/efi"


@pytest.mark.parametrize(
    ("width", "told"), [(19, "/, /home, /boot/efi"), (18, "/, /home, 1 more"), (11, "/, 2 more"), (8, "")]
)
def test_what_does_not_fit_is_counted(width, told):
    assert holdings(KEEP, width) == told


def test_where_only_a_count_fits_it_is_given():
    place = Place(device="/dev/sda", lives_here=replace(RETIRE).place.lives_here)
    assert holdings(replace(RETIRE, place=place), 10) == "1 mounted"


def test_where_there_is_room_the_amount_in_use_is_told():
    assert holdings(RETIRE, 40, roomy=True) == "/srv/photos (7.2 TB used)"
    assert holdings(RETIRE, 20, roomy=True) == "/srv/photos"


def test_the_reason_is_that_of_the_call():
    assert reason(COPY) == "Pending sectors rose from 0 to 24 in 9 powered days."


def test_a_standing_call_goes_before_a_pass_that_failed():
    failed = LastPass(at=NOW, outcome=Outcome.TIMED_OUT, explanation="It did not answer within 60 seconds.")
    assert reason(replace(COPY, last_pass=failed)) == reason(COPY)
    assert reason(replace(KEEP, last_pass=failed)) == "It did not answer within 60 seconds."


def test_an_unread_drive_says_why_it_was_not_read():
    assert reason(UNREAD) == "Reading /dev/sde needs the right to do so."


def test_a_pass_without_an_explanation_is_named_by_its_outcome():
    silent = replace(UNREAD, last_pass=LastPass(at=NOW, outcome=Outcome.GARBLED, explanation=None))
    assert reason(silent) == "The last pass ended as garbled and gave no reason."


def test_a_drive_that_was_never_asked_says_so():
    assert reason(replace(UNREAD, last_pass=None)) == "It has not been asked yet."


def test_a_virtual_disk_is_watched_by_its_traffic_alone():
    assert reason(VIRTUAL) == "It has no SMART: watched by its traffic alone."


def test_the_cause_is_told_with_its_probability():
    assert cause(RETIRE) == "cause: media, 92 % likely"
    assert cause(KEEP) == ""


def test_text_from_a_drive_is_made_harmless():
    evil = replace(COPY, label="\x1b[2Jgone", call=called(CallWord.COPY, "bell\x07"))
    assert name(evil) == "\\x1b[2Jgone"
    assert reason(evil) == "bell\\x07"
