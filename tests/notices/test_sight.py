from dataclasses import replace

import pytest

from diskwatch.errors import NothingToWorkOn
from diskwatch.notices.sight import STALE, look, seen
from diskwatch.records import Bays
from tests.notices.samples import line
from tests.samples import NOON


def bays(*lines, watcher=7, at=NOON + 60, trouble=()):
    return Bays(at=at, watcher=watcher, drives=lines, trouble=trouble)


def test_where_somebody_watches_there_is_no_trouble_and_drives_have_lasting_names():
    found = seen(bays(line("copy")))
    assert found.trouble is None
    assert list(found.lines) == ["Nordwall NW4000 INVENTED INV0001"]


@pytest.mark.parametrize(
    ("found", "told"),
    [
        (bays(line("keep"), watcher=None), "Nobody is watching the drives; the last pass was 1 minute ago."),
        (bays(watcher=None), "Nobody is watching the drives."),
        (bays(line("keep"), trouble=("The history is full.",)), "The watch has trouble: The history is full."),
        (bays(line("keep"), at=NOON + STALE + 1), "The watch runs, but no drive has been asked for 2 days."),
    ],
)
def test_whatever_keeps_anybody_from_watching_is_told(found, told):
    assert seen(found).trouble == told


def test_drives_that_are_left_to_their_sleep_are_no_trouble():
    resting = replace(line("keep"), left_out="It is asked again later.")
    assert seen(bays(resting, at=NOON + 9 * STALE)).trouble is None


def test_a_history_that_cannot_be_read_is_trouble_and_no_end(tmp_path):
    assert "cannot be read" in (look(lambda: tmp_path / "none", NOON).trouble or "")

    def lost():
        raise NothingToWorkOn("no folder")

    assert "no folder" in (look(lost, NOON).trouble or "")
