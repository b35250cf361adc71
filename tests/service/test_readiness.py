import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.records import Outcome
from diskwatch.service.readiness import checks
from tests.samples import HDD, NOON, VIRTUAL, missed, read


def lacking(*passes, troubles=(), history=None, watcher=1):
    found = checks(
        [(one.drive.identity.path, one) for one in passes], troubles, history=history, watcher=watcher
    )
    return [(one.name, one.cure is not None) for one in found if one.lacking]


def test_a_machine_whose_drives_can_all_be_read_lacks_nothing():
    assert lacking(read(NOON)) == []


@pytest.mark.parametrize(
    "outcome", [Outcome.REFUSED, Outcome.TIMED_OUT, Outcome.GARBLED, Outcome.ABSENT, Outcome.NO_SMART]
)
def test_a_drive_that_cannot_be_read_is_lacking_and_has_a_cure(outcome):
    assert lacking(missed(NOON, outcome)) == [("/dev/sda", True)]


def test_sleep_and_a_virtual_disk_are_nothing_to_cure():
    assert lacking(missed(NOON, Outcome.ASLEEP), missed(NOON, Outcome.NO_SMART, VIRTUAL)) == []


def test_a_missing_tool_is_told_once_and_not_for_each_drive():
    one = missed(NOON, Outcome.NO_TOOL)
    assert one.explanation is not None
    assert lacking(one, one, troubles=(one.explanation,)) == [("drives", False)]


def test_what_is_wrong_with_the_tool_is_told_of_a_drive_where_the_listing_did_not_meet_it():
    found = lacking(missed(NOON, Outcome.NO_TOOL), troubles=("drives may be missing",))
    assert found == [("drives", False), ("/dev/sda", True)]


def test_a_history_that_cannot_be_written_and_a_machine_without_drives_are_lacking():
    assert lacking(history="/state cannot be written by you.") == [("drives", True), ("history", True)]


def test_a_kernel_that_cannot_be_heard_is_lacking_and_has_a_cure():
    deaf = DiskwatchError("the kernel's log cannot be read: Permission denied", hint="watch as root")
    found = checks([("/dev/sda", read(NOON, HDD))], (), history=None, watcher=1, kernel_log=deaf)
    (one,) = [one for one in found if one.lacking]
    assert (one.name, one.cure) == ("kernel log", "watch as root")
    assert "Permission denied" in one.text


def test_nobody_watching_is_told_but_is_no_lack_of_the_machine():
    found = checks([("/dev/sda", read(NOON, HDD))], (), history=None, watcher=None)
    assert [(one.text, one.lacking) for one in found if one.name == "watch"] == [
        ("Nobody is watching now.", False)
    ]
