import pytest

from diskwatch.errors import UsageError
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.service.removal import move_house
from tests.history.examples import NOON, a_drive, a_place


@pytest.fixture
def folder(tmp_path):
    with History.open(tmp_path / "state") as history:
        history.admit(a_drive(), a_place(), NOON)
    return tmp_path / "state"


def test_the_move_stands_in_the_day_book_of_the_new_place(folder, tmp_path):
    moved, told = move_house(folder, tmp_path / "new", NOON)
    with Past.open(tmp_path / "new") as past:
        (entry,) = past.day_book()
    assert (entry.kind, entry.text, entry.at) == ("watch", moved.sentence(), NOON)
    assert told.done[0] == moved.sentence()


def test_a_move_within_one_file_system_is_said_to_save_nothing(folder, tmp_path):
    _, told = move_house(folder, tmp_path / "new", NOON)
    assert "on the same drive still" in told.done[-1]


def test_what_cannot_be_meant_moves_nothing(folder):
    with pytest.raises(UsageError):
        move_house(folder, folder, NOON)
    with Past.open(folder) as past:
        assert past.day_book() == ()
