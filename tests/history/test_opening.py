import hashlib
import os
import sqlite3
import subprocess
from contextlib import closing, suppress
from pathlib import Path

import pytest

from diskwatch.errors import HistoryDamaged, HistoryError, HistoryTooNew, NothingToWorkOn
from diskwatch.history import versions
from diskwatch.history.opening import Opened, is_ours, open_to_read, refuse_foreign
from diskwatch.history.writer import History
from diskwatch.places import HISTORY, WATCH_LOCK, WRITE_LOCK
from tests.history.examples import NOON, a_drive, a_place


@pytest.fixture
def path(folder):
    """A history that its writer has closed."""
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
    return folder / HISTORY


def _all_of(folder: Path) -> dict[str, tuple[str, int]]:
    return {
        file.name: (hashlib.sha256(file.read_bytes()).hexdigest(), file.stat().st_mtime_ns)
        for file in folder.iterdir()
    }


def _drives(opened: Opened) -> int:
    (found,) = opened.connection.execute("SELECT count(*) FROM drive").fetchone()
    return int(found)


def test_a_history_that_nobody_writes_is_read_as_it_lies_and_nothing_is_laid_beside_it(path):
    before = _all_of(path.parent)
    with closing(open_to_read(path)) as opened:
        assert opened.frozen
        assert _drives(opened) == 1
        assert opened.holds()
        assert _all_of(path.parent) == before
    assert _all_of(path.parent) == before


def test_a_history_that_is_being_written_is_read_with_its_log(path):
    with History.open(path.parent) as history:
        history.admit(a_drive("INVENTED-2"), a_place("/dev/sdb"), NOON)
        with closing(open_to_read(path)) as opened:
            assert not opened.frozen
            assert _drives(opened) == 2
            history.admit(a_drive("INVENTED-3"), a_place("/dev/sdc"), NOON)
            assert _drives(opened) == 3
            assert opened.holds()


def test_what_was_read_as_it_lay_does_not_hold_once_somebody_writes(path):
    with closing(open_to_read(path)) as opened:
        with History.open(path.parent):
            assert not opened.holds()
        path.unlink()
        assert not opened.holds()


def test_a_connection_for_reading_cannot_write(path):
    with closing(open_to_read(path)) as opened, pytest.raises(sqlite3.OperationalError, match="readonly"):
        opened.connection.execute("DELETE FROM drive")


@pytest.mark.parametrize("name", ["a ? b", "a # b", "a % b", "a%20b", "ä\n"])
def test_a_folder_may_have_any_name(tmp_path, name):
    with History.open(tmp_path / name):
        pass
    open_to_read(tmp_path / name / HISTORY).close()


def test_no_history_yet_says_how_to_start(tmp_path):
    with pytest.raises(NothingToWorkOn, match="watch --once"):
        open_to_read(tmp_path / HISTORY)
    assert list(tmp_path.iterdir()) == []


def test_an_empty_file_is_no_history_yet(tmp_path):
    (tmp_path / HISTORY).touch()
    with pytest.raises(NothingToWorkOn):
        open_to_read(tmp_path / HISTORY)
    refuse_foreign(tmp_path / HISTORY)


def test_a_history_whose_first_step_was_cut_short_is_no_history_yet(tmp_path):
    with closing(sqlite3.connect(tmp_path / HISTORY)) as connection:
        connection.execute("CREATE TABLE _sqlite_migrations (id INTEGER, migration_set TEXT, name TEXT)")
    with pytest.raises(NothingToWorkOn):
        open_to_read(tmp_path / HISTORY)


@pytest.mark.parametrize("opener", [open_to_read, refuse_foreign, lambda path: History.open(path.parent)])
@pytest.mark.parametrize(
    "statement",
    [
        "PRAGMA user_version = 99",
        "INSERT INTO _sqlite_migrations (migration_set, name, applied_at) VALUES ('diskwatch', '9999_x', '')",
    ],
)
def test_a_newer_history_is_refused_and_left_untouched(path, opener, statement):
    with closing(sqlite3.connect(path)) as connection:
        connection.execute(statement)
        connection.commit()
    before = _all_of(path.parent)
    with pytest.raises(HistoryTooNew):
        opener(path)
    assert _all_of(path.parent) == before


def test_an_older_history_that_no_view_makes_readable_waits_for_the_watch(path, monkeypatch):
    monkeypatch.setattr(versions, "MIGRATIONS", (*versions.MIGRATIONS, "9999_invented"))
    with pytest.raises(HistoryError, match="older version"):
        open_to_read(path)
    refuse_foreign(path)


@pytest.mark.parametrize("opener", [open_to_read, refuse_foreign, lambda path: History.open(path.parent)])
@pytest.mark.parametrize(
    "content", [b"no database at all" * 100, b"SQLite format 3\0" + b"\xff" * 4096, b"SQLite format 3\0", b"x"]
)
def test_a_file_that_is_no_history_is_refused_by_name_and_left_untouched(tmp_path, opener, content):
    path = tmp_path / HISTORY
    path.write_bytes(content)
    before = _all_of(tmp_path)
    with pytest.raises(HistoryError, match=r"history\.db is no history.*move it away") as caught:
        opener(path)
    assert not isinstance(caught.value, HistoryDamaged)  # or the watch would set it aside
    assert _all_of(tmp_path) == before


@pytest.mark.parametrize("sign", ["the lock", "the application id"])
def test_a_damaged_file_is_ours_by_the_lock_beside_it_or_by_its_application_id(path, sign):
    assert is_ours(path)
    if sign == "the lock":
        path.write_bytes(b"\xff" * 4096)
    else:
        for name in (WATCH_LOCK, WRITE_LOCK):
            path.with_name(name).unlink()
        path.write_bytes(b"\xff" * 60 + path.read_bytes()[60:])
    with pytest.raises(HistoryDamaged, match="the watch sets it aside"):
        refuse_foreign(path)
    for name in (WATCH_LOCK, WRITE_LOCK):
        path.with_name(name).unlink(missing_ok=True)
    path.write_bytes(b"\xff" * 4096)
    assert not is_ours(path)
    assert not is_ours(path.with_name("nowhere") / HISTORY)


@pytest.mark.parametrize("opener", [open_to_read, refuse_foreign, lambda path: History.open(path.parent)])
@pytest.mark.parametrize("kept", [600, 4096, 5000, -4096])
def test_a_history_that_was_cut_short_is_called_damaged_and_left_untouched(path, opener, kept):
    path.write_bytes(path.read_bytes()[:kept])
    before = _all_of(path.parent)
    with pytest.raises(HistoryError, match=r"history\.db is damaged"):
        opener(path)
    assert _all_of(path.parent) == before


@pytest.mark.parametrize("opener", [open_to_read, refuse_foreign, lambda path: History.open(path.parent)])
def test_an_empty_file_with_a_log_beside_it_is_not_taken_for_a_new_history(path, opener):
    path.write_bytes(b"")
    path.with_name(HISTORY + "-wal").write_bytes(b"\x37" * 5000)
    before = _all_of(path.parent)
    with pytest.raises(HistoryError, match=r"history\.db is"):
        opener(path)
    assert _all_of(path.parent) == before


def test_a_damaged_log_does_not_hide_what_was_folded_in_before(path):
    log = path.with_name(HISTORY + "-wal")
    log.write_bytes(b"\xff" * 5000)
    with closing(open_to_read(path)) as opened:
        assert _drives(opened) == 1


def test_an_empty_log_that_was_left_behind_hides_nothing(path):
    path.with_name(HISTORY + "-wal").touch()
    with closing(open_to_read(path)) as opened:
        assert _drives(opened) == 1


@pytest.mark.parametrize("opener", [open_to_read, refuse_foreign, lambda path: History.open(path.parent)])
@pytest.mark.parametrize("beside", ["", "-wal", "-shm", "-journal"])
def test_a_link_or_a_pipe_in_its_place_or_beside_it_is_refused_and_nothing_waits_for_it(path, opener, beside):
    victim = path.with_name("victim")
    path.rename(victim)
    if beside:
        victim.rename(path)
        victim.write_text("what somebody else needs")
    there, whole = path.with_name(path.name + beside), victim.read_bytes()
    there.symlink_to(victim)
    with pytest.raises(HistoryError, match="symbolic link"):
        opener(path)
    there.unlink()
    os.mkfifo(there)
    with pytest.raises(HistoryError, match="is a pipe"):
        opener(path)
    there.unlink()
    assert victim.read_bytes() == whole


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can give files to other users")
@pytest.mark.parametrize("whole", [True, False], ids=["folder and all", "the file alone"])
def test_root_reads_the_history_of_another_user_but_leaves_no_byte_in_it(path, whole):
    for given in (path, *([path.parent] if whole else [])):
        os.chown(given, 65534, 65534)
    before = _all_of(path.parent)
    with pytest.raises(HistoryError, match="run as that user, or name another folder"):
        History.open(path.parent)
    with closing(open_to_read(path)) as opened:
        assert _drives(opened) == 1
    assert _all_of(path.parent) == before


def test_a_folder_in_its_place_is_told(tmp_path):
    (tmp_path / HISTORY).mkdir()
    with pytest.raises(HistoryError, match=r"history\.db"):
        open_to_read(tmp_path / HISTORY)


@pytest.fixture
def full(tmp_path):
    """A small file system of its own, and how to fill it."""
    state = tmp_path / "mount"
    state.mkdir()
    made = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=4m", "none", str(state)], capture_output=True, check=False
    )
    if made.returncode != 0:
        pytest.skip("this machine lets nobody mount anything")

    def fill():
        descriptor = os.open(state / "fill", os.O_WRONLY | os.O_CREAT)
        with suppress(OSError):
            while True:
                os.write(descriptor, bytes(1024))
        os.close(descriptor)

    yield state / "history", fill
    subprocess.run(["umount", "-l", str(state)], check=False)


needs_root = pytest.mark.skipif(os.geteuid() != 0, reason="needs root to mount a file system of its own")


@needs_root
@pytest.mark.parametrize("in_log", [False, True])
def test_on_a_full_disk_a_history_is_read_with_all_that_stands_in_its_log(full, in_log):
    folder, fill = full
    path = folder / HISTORY
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        left = {ending: path.with_name(path.name + ending).read_bytes() for ending in ("", "-wal")}
    if in_log:
        # As a watch leaves them that was killed.
        for ending, content in left.items():
            path.with_name(path.name + ending).write_bytes(content)
    else:
        path.with_name(f"{path.name}-wal").touch()
    fill()
    before = _all_of(folder)
    with closing(open_to_read(path)) as opened:
        assert _drives(opened) == 1
        assert opened.frozen
        assert opened.holds()
        with pytest.raises(sqlite3.Error):
            opened.connection.execute("DELETE FROM drive")
    assert before.items() <= _all_of(folder).items()


@needs_root
def test_where_there_is_no_room_in_memory_either_the_trouble_is_said(full, monkeypatch):
    folder, fill = full
    path = folder / HISTORY
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        log = path.with_name(f"{path.name}-wal").read_bytes()
    path.with_name(f"{path.name}-wal").write_bytes(log)
    fill()
    monkeypatch.setattr("diskwatch.history.private._ROOM", 1e12)
    with pytest.raises(HistoryError, match="has no space left"):
        open_to_read(path)
