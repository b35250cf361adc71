import os
import sqlite3
import stat
from contextlib import closing

import pytest

from diskwatch import places
from diskwatch.errors import HistoryError, HistoryHeld, NothingToWorkOn, UsageError
from diskwatch.history import care, relocation
from diskwatch.history.lock import WatchLock, watcher
from diskwatch.history.reader import Past
from diskwatch.history.relocation import move
from diskwatch.history.writer import History
from diskwatch.places import HISTORY, POINTER
from diskwatch.records import Entry
from tests.history.examples import NOON, a_drive, a_place, full_round


@pytest.fixture
def full(folder):
    """A folder with a history that has something in all of its tables."""
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        history.record(full_round(known))
        history.note(Entry(at=NOON, drive=None, kind="watch", text="Watching began."))
    return folder


def dump(path):
    with closing(sqlite3.connect(path)) as connection:
        return list(connection.iterdump())


def test_every_row_is_at_the_new_place_and_the_old_file_is_kept_whole(full, tmp_path):
    before = dump(full / HISTORY)
    moved = move(full, tmp_path / "new" / "place", NOON)
    assert dump(moved.to / HISTORY) == before
    assert dump(moved.aside) == before
    assert moved.rows > 20
    assert str(moved.aside) in {str(path) for path in full.iterdir()}
    assert not (full / HISTORY).exists()
    assert "each held against the old one" in moved.sentence()


def test_nothing_but_the_old_file_and_the_pointer_is_left_behind(full, tmp_path):
    moved = move(full, tmp_path / "new", NOON)
    left = {path.name for path in full.iterdir()}
    assert left == {moved.aside.name, POINTER, places.WATCH_LOCK, places.WRITE_LOCK}


def test_from_a_drive_that_is_mounted_read_only_it_says_what_can_still_be_done(full, tmp_path, monkeypatch):
    real = os.statvfs(full)
    told = os.statvfs_result([*real[:8], real.f_flag | os.ST_RDONLY, real.f_namemax])
    monkeypatch.setattr(os, "statvfs", lambda _: told)
    with pytest.raises(HistoryError, match=r"mounted read-only, .* with --state"):
        move(full, tmp_path / "new", NOON)
    assert (full / HISTORY).exists()


def test_whoever_names_the_old_place_is_led_to_the_new_one(full, tmp_path):
    new = move(full, tmp_path / "new", NOON).to
    assert places.state_folder(str(full)) == new
    newer = move(new, tmp_path / "newer", NOON).to
    assert places.state_folder(str(full)) == newer
    with History.open(places.state_folder(str(full))) as history:
        assert len(history.known()) == 1


def test_a_history_may_come_back_to_where_it_lay(full, tmp_path):
    new = move(full, tmp_path / "new", NOON).to
    move(new, full, NOON)
    assert places.state_folder(str(full)) == full
    assert places.state_folder(str(new)) == full
    assert not (full / POINTER).exists()


def test_where_the_new_place_is_not_mounted_no_new_history_is_begun_in_the_old_one(full, tmp_path):
    new = move(full, tmp_path / "new", NOON).to
    new.rename(tmp_path / "unplugged")
    assert places.state_folder(str(full)) == full
    for open_it in (Past.open, History.open):
        with pytest.raises(HistoryError, match=r"was moved to .* not found there; mount the drive"):
            open_it(full)
    assert not (full / HISTORY).exists()
    (full / POINTER).unlink()
    with pytest.raises(NothingToWorkOn):
        Past.open(full)


def test_ordinary_users_may_read_it_at_the_new_place_whatever_the_umask(full, tmp_path):
    before = os.umask(0o077)
    try:
        moved = move(full, tmp_path / "new", NOON)
    finally:
        os.umask(before)
    assert stat.S_IMODE(moved.to.stat().st_mode) == 0o755
    for path in (moved.to / HISTORY, full / POINTER):
        assert stat.S_IMODE(path.stat().st_mode) == 0o644


def test_a_history_that_is_being_written_is_not_moved_under_its_writer(full, tmp_path):
    lock = WatchLock.take(full)
    try:
        with pytest.raises(HistoryHeld):
            move(full, tmp_path / "new", NOON)
    finally:
        lock.release()
    assert (full / HISTORY).exists()
    assert not (tmp_path / "new").exists()


def test_a_reader_that_is_open_meanwhile_reads_on_and_then_learns_of_the_move(full, tmp_path):
    with Past.open(full) as past:
        assert past.day_book()
        move(full, tmp_path / "new", NOON)
        with pytest.raises(HistoryError, match="was moved to"):
            past.day_book()


def test_what_cannot_be_meant_is_refused_and_changes_nothing(full, tmp_path):
    (tmp_path / "file").write_text("mine")
    (tmp_path / "link").symlink_to(full)
    for odd in (full, tmp_path / "link", full / ".." / full.name, tmp_path / "file", tmp_path / "a\nb"):
        with pytest.raises(UsageError):
            move(full, odd, NOON)
    with pytest.raises(NothingToWorkOn):
        move(tmp_path / "none", tmp_path / "new", NOON)
    assert sorted(path.name for path in tmp_path.iterdir() if path.name in {"file", "none", "new"}) == ["file"]
    assert (full / HISTORY).exists()


def test_a_history_that_lies_there_already_is_left_untouched(full, tmp_path):
    with History.open(tmp_path / "other"):
        pass
    before = (tmp_path / "other" / HISTORY).read_bytes()
    with pytest.raises(HistoryError, match="already; it is left untouched"):
        move(full, tmp_path / "other", NOON)
    assert (tmp_path / "other" / HISTORY).read_bytes() == before
    assert (full / HISTORY).exists()


@pytest.mark.parametrize("step", ["lay_copy", "check", "_equal_rows", "_point", "give_name", "_put_aside"])
def test_whichever_step_fails_the_old_history_stays_in_use_and_nothing_half_made_is_left(
    full, tmp_path, monkeypatch, step
):
    def fail(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    before = dump(full / HISTORY)
    monkeypatch.setattr(relocation, step, fail)
    with pytest.raises(HistoryError, match="full"):
        move(full, tmp_path / "new", NOON)
    assert places.state_folder(str(full)) == full
    assert dump(full / HISTORY) == before
    assert not (full / POINTER).exists()
    assert watcher(full) is None
    assert watcher(tmp_path / "new") is None
    assert not list((tmp_path / "new").glob("*making*"))


def test_a_copy_that_is_not_equal_is_not_taken_up(full, tmp_path, monkeypatch):
    real = care.lay_copy

    def altered(source, making, stop):
        done = real(source, making, stop)
        with closing(sqlite3.connect(making)) as connection, connection:
            connection.execute("UPDATE day_book SET at = at + 1 WHERE number = 1")
        return done

    monkeypatch.setattr(relocation, "lay_copy", altered)
    with pytest.raises(HistoryError, match="is not equal"):
        move(full, tmp_path / "new", NOON)
    assert places.state_folder(str(full)) == full


def test_a_full_disk_at_the_new_place_is_named_as_that(full, tmp_path, monkeypatch):
    def fill() -> None:
        with closing(sqlite3.connect(":memory:")) as small:
            small.execute("PRAGMA max_page_count = 1")
            small.execute("CREATE TABLE much (x)")

    with pytest.raises(sqlite3.OperationalError) as raised:
        fill()
    error = raised.value
    assert error.sqlite_errorcode == sqlite3.SQLITE_FULL

    class Full(sqlite3.Connection):
        def backup(self, *_: object, **__: object) -> None:
            raise error

    real = care.reading

    def reading(path):
        uri = path.resolve().as_uri() + "?mode=ro"
        return closing(sqlite3.connect(uri, uri=True, isolation_level=None, factory=Full))

    monkeypatch.setattr(care, "reading", reading)
    with pytest.raises(HistoryError, match=r"new/\.history\.db\.making cannot be written: .* full"):
        move(full, tmp_path / "new", NOON)
    monkeypatch.setattr(care, "reading", real)
    assert (full / HISTORY).exists()
