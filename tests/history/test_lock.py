import json
import os
import subprocess
import sys

import pytest

from diskwatch.errors import HistoryError, HistoryHeld
from diskwatch.history.lock import WatchLock, watcher
from diskwatch.places import WATCH_LOCK

_HOLDER = """
import sys
from pathlib import Path
from diskwatch.history.lock import WatchLock
lock = WatchLock.take(Path(sys.argv[1]))
print("held", flush=True)
sys.stdin.read()
"""


@pytest.fixture
def holder(tmp_path):
    """Another process that holds the lock of tmp_path until it is ended."""
    with subprocess.Popen(
        [sys.executable, "-c", _HOLDER, str(tmp_path)], stdin=subprocess.PIPE, stdout=subprocess.PIPE
    ) as child:
        assert child.stdout is not None
        assert child.stdout.readline() == b"held\n"
        yield child
        child.kill()


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
    assert json.loads(path.read_text()) == {"pid": os.getpid(), "since": 1_796_126_400}
    lock.release()
    assert path.read_text() == ""
    lock.release()


def test_everybody_may_read_the_lock_whatever_the_umask(tmp_path):
    before = os.umask(0o077)
    try:
        WatchLock.take(tmp_path).release()
    finally:
        os.umask(before)
    assert (tmp_path / WATCH_LOCK).stat().st_mode & 0o777 == 0o644


def test_a_lock_that_cannot_be_laid_is_told_with_its_name(tmp_path):
    (tmp_path / WATCH_LOCK).mkdir()
    with pytest.raises(HistoryError, match=r"watch\.lock"):
        WatchLock.take(tmp_path)
