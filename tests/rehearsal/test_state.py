import pytest

from diskwatch.errors import UsageError
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import DriveRound, Entry, Outcome, Pass, Round
from diskwatch.rehearsal.state import begun, claim, holds_rehearsal
from diskwatch.service.keeper import Keeper
from diskwatch.service.owner import settle
from tests.rehearsal.examples import alone, hdd, nvme
from tests.samples import HDD as REAL, HERE, NOON


def keep(folder, *drives, mark=True):
    keeper = Keeper(folder)
    if mark:
        keeper.note(begun("x", NOON))
    rounds = tuple(
        DriveRound(
            known=keeper.admit(drive, HERE, NOON),
            pass_=Pass(at=NOON, outcome=Outcome.ABSENT, explanation="x", drive=drive),
            state=None,
        )
        for drive in drives
    )
    keeper.record(Round(at=NOON, drives=rounds))
    keeper.close()
    assert keeper.trouble is None


def test_an_empty_folder_is_taken_as_it_is(tmp_path):
    assert claim(tmp_path / "none") is False
    assert claim(tmp_path) is False


def test_a_folder_that_holds_a_real_drive_is_refused_and_left_alone(tmp_path):
    keep(tmp_path, alone(hdd()).drive, REAL)
    before = (tmp_path / "history.db").read_bytes()
    with pytest.raises(UsageError, match="real drives"):
        claim(tmp_path)
    assert (tmp_path / "history.db").read_bytes() == before


def refused_whole(folder, why):
    """Whether a folder was refused, and not a byte of its history changed."""
    before = (folder / "history.db").read_bytes()
    with pytest.raises(UsageError, match=why):
        claim(folder)
    return (folder / "history.db").read_bytes() == before


def test_a_real_drive_whose_place_an_invented_one_has_taken_is_refused_like_any_other(tmp_path):
    keep(tmp_path, REAL, alone(hdd()).drive)
    with History.open(tmp_path) as history:
        settle(history, {"drive": 1, "because": "replaced", "replaced_by": 2}, NOON + 1)
    with Past.open(tmp_path) as past:
        assert [line.drive for line in past.bays(NOON).departed] == [REAL]
    assert refused_whole(tmp_path, "real drives")


def test_a_history_without_the_mark_of_a_rehearsal_is_refused_whatever_drives_it_holds(tmp_path):
    keep(tmp_path, alone(hdd()).drive, mark=False)
    assert refused_whole(tmp_path, "no rehearsal began")


def test_a_day_book_without_drives_is_refused(tmp_path):
    keeper = Keeper(tmp_path)
    keeper.note(Entry(at=NOON, drive=None, kind="watch", text="Watching began."))
    keeper.close()
    assert refused_whole(tmp_path, "no rehearsal began")


def test_a_rehearsal_that_ended_before_its_first_round_gives_way(tmp_path):
    keep(tmp_path)
    assert claim(tmp_path) is True


def test_an_earlier_rehearsal_gives_way(tmp_path):
    keep(tmp_path, alone(hdd()).drive, alone(nvme()).drive)
    assert claim(tmp_path) is True
    assert not list(tmp_path.glob("history.db*"))


def test_a_rehearsal_is_told_from_a_history_into_which_real_drives_may_be_watched(tmp_path):
    keep(tmp_path / "invented", alone(hdd()).drive)
    keep(tmp_path / "mixed", alone(hdd()).drive, REAL)
    keep(tmp_path / "unmarked", alone(hdd()).drive, mark=False)
    assert holds_rehearsal(tmp_path / "invented")
    for other in ("mixed", "unmarked", "none"):
        assert not holds_rehearsal(tmp_path / other)
