import errno
import fcntl
import json
import os
import signal
import subprocess
import sys
from contextlib import contextmanager

import pytest

from diskwatch.errors import HistoryError, HistoryHeld
from diskwatch.history import processes
from diskwatch.history.guarding import open_plain
from diskwatch.history.lock import WatchLock, watcher
from diskwatch.history.processes import this_process
from diskwatch.places import WATCH_LOCK, WRITE_LOCK

OTHER = 65534

_HOLDER = """
import sys
from pathlib import Path
from diskwatch.history.lock import WatchLock
lock = WatchLock.take(Path(sys.argv[1]))
print("held", flush=True)
sys.stdin.read()
"""

_READER = """
import fcntl, os, sys
descriptor = os.open(sys.argv[1], os.O_RDONLY)
fcntl.lockf(descriptor, fcntl.LOCK_SH)
print("held", flush=True)
sys.stdin.read()
"""


@contextmanager
def _running(program, *words):
    with subprocess.Popen(
        [sys.executable, "-c", program, *map(str, words)], stdin=subprocess.PIPE, stdout=subprocess.PIPE
    ) as child:
        assert child.stdout is not None
        assert child.stdout.readline() == b"held\n"
        try:
            yield child
        finally:
            child.kill()


@pytest.fixture
def holder(tmp_path):
    """Another process that holds the lock of tmp_path until it is ended."""
    with _running(_HOLDER, tmp_path) as child:
        yield child


def test_nobody_watches_where_there_is_no_lock(tmp_path):
    assert watcher(tmp_path) is None
    assert watcher(tmp_path / "nowhere") is None
    assert list(tmp_path.iterdir()) == []


def test_another_process_that_holds_it_is_named(tmp_path, holder):
    assert watcher(tmp_path) == holder.pid
    with pytest.raises(HistoryHeld, match=f"process {holder.pid}"):
        WatchLock.take(tmp_path)
    assert watcher(tmp_path) == holder.pid


def test_a_holder_that_is_killed_holds_no_more(tmp_path, holder):
    holder.kill()
    holder.wait()
    assert watcher(tmp_path) is None
    WatchLock.take(tmp_path).release()


def test_the_same_process_cannot_take_it_twice(tmp_path):
    lock = WatchLock.take(tmp_path)
    with pytest.raises(HistoryHeld, match=f"process {os.getpid()}"):
        WatchLock.take(tmp_path)
    lock.release()
    WatchLock.take(tmp_path).release()


def test_asking_does_not_lose_the_lock_that_this_process_holds(tmp_path):
    lock = WatchLock.take(tmp_path)
    assert watcher(tmp_path) == os.getpid()
    asked = "import sys; from pathlib import Path; from diskwatch.history.lock import watcher"
    asked += "; print(watcher(Path(sys.argv[1])))"
    ended = subprocess.run([sys.executable, "-c", asked, str(tmp_path)], capture_output=True, check=True)
    assert int(ended.stdout) == os.getpid()
    lock.release()


def test_who_holds_it_and_since_when_stands_in_the_file_only_while_it_is_held(tmp_path, monkeypatch):
    monkeypatch.setattr("diskwatch.history.lock.time.time", lambda: 1_796_126_400.5)
    lock = WatchLock.take(tmp_path)
    path = tmp_path / WATCH_LOCK
    me = this_process()
    assert me is not None
    assert json.loads(path.read_text()) == {
        "pid": os.getpid(),
        "since": 1_796_126_400,
        "started": me.started,
        "boot": me.boot,
    }
    lock.release()
    assert path.read_text() == ""
    lock.release()


def test_everybody_may_read_who_watches_but_only_the_owner_the_lock_that_decides_whatever_the_umask(tmp_path):
    before = os.umask(0)
    try:
        WatchLock.take(tmp_path).release()
        assert (tmp_path / WRITE_LOCK).stat().st_mode & 0o777 == 0o600
        (tmp_path / WATCH_LOCK).unlink()
        os.umask(0o077)
        WatchLock.take(tmp_path).release()
    finally:
        os.umask(before)
    assert (tmp_path / WATCH_LOCK).stat().st_mode & 0o777 == 0o644
    assert (tmp_path / WRITE_LOCK).stat().st_mode & 0o777 == 0o600


def test_a_lock_that_others_may_open_is_closed_to_them(tmp_path):
    (tmp_path / WRITE_LOCK).touch(mode=0o666)
    WatchLock.take(tmp_path).release()
    assert (tmp_path / WRITE_LOCK).stat().st_mode & 0o777 == 0o600


def test_a_reader_that_locks_what_it_may_read_neither_stops_the_watch_nor_hides_it(tmp_path):
    WatchLock.take(tmp_path).release()
    with _running(_READER, tmp_path / WATCH_LOCK) as reader:
        assert watcher(tmp_path) is None
        with _running(_HOLDER, tmp_path) as holder:
            assert watcher(tmp_path) == holder.pid
            with pytest.raises(HistoryHeld, match=f"process {holder.pid}"):
                WatchLock.take(tmp_path)
            holder.kill()
            holder.wait()
            assert watcher(tmp_path) is None
        reader.kill()


def test_a_reader_that_comes_later_cannot_lock_it(tmp_path, holder):
    descriptor = os.open(tmp_path / WATCH_LOCK, os.O_RDONLY)
    with pytest.raises(BlockingIOError):
        fcntl.lockf(descriptor, fcntl.LOCK_SH | fcntl.LOCK_NB)
    os.close(descriptor)
    assert watcher(tmp_path) == holder.pid


def test_a_watch_that_was_killed_and_not_yet_buried_watches_no_more(tmp_path):
    WatchLock.take(tmp_path).release()
    with _running(_READER, tmp_path / WATCH_LOCK), _running(_HOLDER, tmp_path) as holder:
        assert watcher(tmp_path) == holder.pid
        holder.send_signal(signal.SIGKILL)
        os.waitid(os.P_PID, holder.pid, os.WEXITED | os.WNOWAIT)
        assert watcher(tmp_path) is None


@pytest.mark.parametrize("change", [{"started": 1}, {"boot": "another start"}, {"started": None}, {"pid": "1"}])
def test_a_number_that_means_another_process_by_now_is_not_believed(tmp_path, change):
    me = this_process()
    assert me is not None
    told = {"pid": me.pid, "since": 1, "started": me.started, "boot": me.boot}
    (tmp_path / WATCH_LOCK).write_text(json.dumps(told))
    assert watcher(tmp_path) == me.pid
    (tmp_path / WATCH_LOCK).write_text(json.dumps(told | change))
    assert watcher(tmp_path) is None


@pytest.mark.parametrize("content", ["", "7", "[]", "{", "\udcff", '{"pid": 1}'])
def test_a_line_that_makes_no_sense_names_nobody(tmp_path, content):
    (tmp_path / WATCH_LOCK).write_text(content, errors="surrogateescape")
    assert watcher(tmp_path) is None


def test_words_that_others_may_write_are_not_believed(tmp_path, holder):
    (tmp_path / WATCH_LOCK).chmod(0o666)
    assert watcher(tmp_path) is None
    (tmp_path / WATCH_LOCK).chmod(0o644)
    assert watcher(tmp_path) == holder.pid


def test_where_processes_cannot_be_seen_the_lock_alone_is_believed(tmp_path, holder, monkeypatch):
    monkeypatch.setattr(processes, "_PROC", tmp_path / "hidden")
    assert watcher(tmp_path) == holder.pid
    holder.kill()
    holder.wait()
    assert watcher(tmp_path) is None


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can give files to other users")
def test_a_watch_that_a_stranger_pretends_is_not_believed(tmp_path, holder):
    os.chown(tmp_path / WATCH_LOCK, OTHER, OTHER)
    assert watcher(tmp_path) is None
    holder.kill()


def test_on_a_full_disk_the_lock_is_kept_and_readers_know_who_watches(tmp_path, monkeypatch):
    def full(*_: object) -> int:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    WatchLock.take(tmp_path).release()
    with monkeypatch.context() as patch:
        patch.setattr("diskwatch.history.lock.os.pwrite", full)
        lock = WatchLock.take(tmp_path)
    assert (tmp_path / WATCH_LOCK).stat().st_size == 0
    assert watcher(tmp_path) == os.getpid()
    asked = "import sys; from pathlib import Path; from diskwatch.history.lock import watcher"
    asked += "; print(watcher(Path(sys.argv[1])))"
    ended = subprocess.run([sys.executable, "-c", asked, str(tmp_path)], capture_output=True, check=True)
    assert int(ended.stdout) == os.getpid()
    with pytest.raises(HistoryHeld):
        WatchLock.take(tmp_path)
    lock.release()
    WatchLock.take(tmp_path).release()


def test_without_room_for_the_file_that_tells_the_lock_is_kept(tmp_path, monkeypatch):

    def no_room(path, *words):
        if path.name == WATCH_LOCK:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return open_plain(path, *words)

    monkeypatch.setattr("diskwatch.history.lock.open_plain", no_room)
    lock = WatchLock.take(tmp_path)
    assert watcher(tmp_path) == os.getpid()
    lock.release()
    assert watcher(tmp_path) is None


@pytest.mark.parametrize("name", [WATCH_LOCK, WRITE_LOCK])
@pytest.mark.parametrize("sort", ["folder", "link", "pipe"])
def test_a_lock_that_cannot_be_laid_is_told_with_its_name_and_nothing_waits_for_it(tmp_path, name, sort):
    there, victim = tmp_path / name, tmp_path / "victim"
    victim.write_text("what somebody else needs")
    {"folder": there.mkdir, "link": lambda: there.symlink_to(victim), "pipe": lambda: os.mkfifo(there)}[sort]()
    with pytest.raises(HistoryError, match=name.replace(".", r"\.")):
        WatchLock.take(tmp_path)
    assert watcher(tmp_path) is None
    assert victim.read_text() == "what somebody else needs"
