import shutil
import sqlite3
from contextlib import closing
from datetime import date

import pytest

from diskwatch.errors import HistoryDamaged, HistoryError
from diskwatch.history.care import check, copies, copy_due, make_copy
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from tests.history.damage import pages, turn
from tests.history.examples import DAY, NOON, a_drive, a_place, a_span, full_round


def never() -> bool:
    return False


@pytest.fixture
def grown(folder):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        for number in range(300):
            history.record(full_round(known, NOON + number * DAY // 2, number))
        history.add_traffic([a_span(1, NOON + minute * 60) for minute in range(3000)])
    return folder


@pytest.mark.parametrize("thorough", [False, True])
def test_a_sound_file_has_no_damage(grown, thorough):
    found = check(grown / HISTORY, thorough=thorough, stop=never)
    assert (found.finished, found.damage) == (True, ())


def test_a_look_for_damage_ends_when_it_is_told_to(grown, monkeypatch):
    monkeypatch.setattr("diskwatch.history.care._STEPS", 100)
    found = check(grown / HISTORY, thorough=True, stop=lambda: True)
    assert (found.finished, found.damage) == (False, ())


@pytest.mark.parametrize("sort", ["first", "table, inner", "table, leaf", "index, inner", "index, leaf"])
def test_a_turned_byte_in_a_page_of_any_sort_is_found(grown, sort):
    path = grown / HISTORY
    page = pages(path)[sort][-1]
    turn(path, page, 101 if sort == "first" else 1)
    found = check(path, thorough=True, stop=never)
    assert found.finished
    assert found.damage


def test_a_file_that_is_not_there_is_no_damage(tmp_path):
    with pytest.raises(HistoryError, match="cannot be opened") as caught:
        check(tmp_path / "none.db", thorough=False, stop=never)
    assert not isinstance(caught.value, HistoryDamaged)


def test_a_copy_is_a_whole_history_of_one_file_that_others_may_read(grown):
    made = make_copy(grown, NOON, stop=never)
    assert made is not None
    assert made == grown / "history-2026-12-01.db"
    assert made.stat().st_mode & 0o777 == 0o644
    with closing(sqlite3.connect(made)) as copy, closing(sqlite3.connect(grown / HISTORY)) as source:
        assert list(copy.iterdump()) == list(source.iterdump())
        assert copy.execute("PRAGMA journal_mode").fetchone() == ("delete",)
    assert {path.name for path in grown.iterdir()} == {HISTORY, "watch.lock", "write.lock", made.name}


def test_a_copy_can_take_the_place_of_the_history(grown, tmp_path):
    made = make_copy(grown, NOON, stop=never)
    assert made is not None
    other = tmp_path / "other"
    other.mkdir()
    shutil.move(made, other / HISTORY)
    with History.open(other) as history:
        assert history.states() == {1: "state 299"}
    with Past.open(other) as past:
        assert len(past.passes(1)) == 300


def test_a_copy_is_of_one_moment_while_the_watch_writes_on(grown, monkeypatch):
    """Rounds are recorded between the chunks of the copy, which neither see them nor begin anew for them."""
    monkeypatch.setattr("diskwatch.history.care._PAGES", 4)
    with History.open(grown) as history:
        known = history.known()[0]
        turns: list[int] = []

        def writes() -> bool:
            if len(turns) < 20:
                history.record(full_round(known, NOON + (200 + len(turns)) * DAY, 500))
            turns.append(1)
            return False

        made = make_copy(grown, NOON, stop=writes)
    assert made is not None
    assert len(turns) >= 20
    with closing(sqlite3.connect(made)) as copy:
        assert copy.execute("SELECT count(*) FROM pass").fetchone() == (300,)
        assert copy.execute("PRAGMA integrity_check").fetchone() == ("ok",)


def test_a_copy_that_is_stopped_leaves_nothing(grown):
    before = set(grown.iterdir())
    assert make_copy(grown, NOON, stop=lambda: True) is None
    assert set(grown.iterdir()) == before


def test_the_last_two_copies_are_kept_and_other_files_left_alone(grown):
    stranger = grown / "history-of-mine.db"
    stranger.touch()
    for day in range(4):
        make_copy(grown, NOON + day * DAY, stop=never)
    assert [made for made, _ in copies(grown)] == [date(2026, 12, 4), date(2026, 12, 3)]
    assert stranger.exists()


def test_a_damaged_history_takes_no_copy_away(grown):
    first, second = (make_copy(grown, NOON + day * DAY, stop=never) for day in range(2))
    turn(grown / HISTORY, pages(grown / HISTORY)["table, leaf"][-1], 1)
    with pytest.raises(HistoryDamaged, match="copies of before are kept"):
        make_copy(grown, NOON + 9 * DAY, stop=never)
    assert [path for _, path in copies(grown)] == [second, first]
    assert not list(grown.glob(".*"))


def test_a_copy_that_cannot_be_made_is_told_by_name(grown):
    (grown / "history-2026-12-01.db").mkdir()
    with pytest.raises(HistoryError, match=r"history-2026-12-01\.db cannot be used"):
        make_copy(grown, NOON, stop=never)


@pytest.mark.parametrize(
    ("how_often", "days_old", "due"),
    [
        ("never", None, False),
        ("daily", None, True),
        ("weekly", None, True),
        ("daily", 0, False),
        ("daily", 1, True),
        ("weekly", 6, False),
        ("weekly", 7, True),
        ("weekly", -300, True),
    ],
)
def test_a_copy_is_due_as_the_owner_wishes_and_one_of_a_day_to_come_does_not_count(
    tmp_path, how_often, days_old, due
):
    if days_old is not None:
        (tmp_path / f"history-{date.fromordinal(date(2026, 12, 1).toordinal() - days_old)}.db").touch()
    assert copy_due(tmp_path, how_often, NOON) is due
