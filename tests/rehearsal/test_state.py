import pytest

from diskwatch.errors import UsageError
from diskwatch.records import DriveRound, Outcome, Pass, Round
from diskwatch.rehearsal.state import claim
from diskwatch.service.keeper import Keeper
from tests.rehearsal.examples import alone, hdd, nvme
from tests.samples import HDD as REAL, HERE, NOON


def keep(folder, *drives):
    keeper = Keeper(folder)
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


def test_an_earlier_rehearsal_gives_way(tmp_path):
    keep(tmp_path, alone(hdd()).drive, alone(nvme()).drive)
    assert claim(tmp_path) is True
    assert not list(tmp_path.glob("history.db*"))
