import os
import subprocess
import time

from diskwatch.cli.dashboard import _may_write
from diskwatch.history.lock import watcher
from tests.cli.run import COMMAND, ROOT, run


def test_without_a_full_terminal_the_bare_command_lists_the_drives_instead(tmp_path):
    ended = run("--state", tmp_path)
    assert ended.code == 3
    assert "no full-screen terminal" in ended.err


def test_a_terminal_that_goes_away_without_a_signal_ends_the_screen_and_its_watch(tmp_path):
    ours, theirs = os.openpty()
    child = subprocess.Popen(
        [*COMMAND, "--state", str(tmp_path)],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        cwd=ROOT,
        start_new_session=True,  # so that it is not its controlling terminal and no SIGHUP comes
        env={**os.environ, "TERM": "xterm-256color"},
    )
    os.close(theirs)
    drawn = b""
    until = time.monotonic() + 20
    while b"diskwatch" not in drawn and time.monotonic() < until:
        drawn += os.read(ours, 65_536)
    while watcher(tmp_path) is None and time.monotonic() < until:
        time.sleep(0.05)
    os.close(ours)
    assert child.wait(10) == 0
    while watcher(tmp_path) is not None and time.monotonic() < until + 10:
        time.sleep(0.05)
    assert watcher(tmp_path) is None


def test_no_watch_is_begun_on_a_history_that_is_not_ours(tmp_path):
    assert _may_write(tmp_path / "new" / "folder")
    (tmp_path / "history.db").write_text("somebody else's", encoding="utf-8")
    assert not _may_write(tmp_path)
