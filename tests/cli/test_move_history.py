import os
import signal
import subprocess
import time

import pytest

from diskwatch.cli import main
from diskwatch.history.lock import WatchLock, watcher
from tests.cli.run import COMMAND, ROOT, run, settings_for
from tests.cli.test_watch import GOOD, book, drives, once


@pytest.fixture
def state(tmp_path):
    once(tmp_path, [GOOD])
    return tmp_path / "state"


def test_every_later_command_and_pass_finds_it_by_its_old_name(tmp_path, state):
    before = drives(tmp_path)
    ended = run("move-history", tmp_path / "new", "--state", state)
    assert (ended.code, ended.err) == (0, "")
    assert "each held against the old one" in ended.out
    assert "on the same drive still" in ended.out
    assert drives(tmp_path) == before
    settings = tmp_path / "settings.toml"
    assert run("watch", "--once", "--state", state, "--settings", settings).code == 0
    assert not (state / "history.db").exists()
    assert len(list(state.glob("history-moved-*.db"))) == 1
    assert any("was moved from" in text for _, text in book(tmp_path))


def test_it_may_move_on_and_back(tmp_path, state):
    for place in ("one", "two", "state"):
        assert run("move-history", tmp_path / place, "--state", state).code == 0
    assert (state / "history.db").exists()
    assert len(drives(tmp_path)) >= 1


def test_a_new_place_that_is_not_mounted_any_more_ends_with_4_and_begins_nothing_anew(tmp_path, state):
    run("move-history", tmp_path / "new", "--state", state)
    (tmp_path / "new").rename(tmp_path / "unplugged")
    for command in (("bays",), ("why", "inv1"), ("tell", "inv1", "--label", "x")):
        ended = run(*command, "--state", state)
        assert ended.code == 4
        assert "mount the drive that it lies on" in ended.err
    settings = tmp_path / "settings.toml"
    watched = run("watch", "--once", "--state", state, "--settings", settings)
    assert watched.code == 4
    assert "/dev/inv1" in watched.out, "the calls are told all the same"
    assert not (state / "history.db").exists()


@pytest.mark.parametrize("where", ["", "  ", "state", "file"])
def test_a_folder_that_cannot_be_meant_is_wrong_usage(tmp_path, state, where):
    (tmp_path / "file").write_text("mine")
    ended = run("move-history", tmp_path / where if where.strip() else where, "--state", state)
    assert ended.code == 2
    assert ended.err.count("\n") == 1
    assert (state / "history.db").exists()


def test_no_history_is_nothing_to_work_on_and_one_that_is_there_already_stays(tmp_path, state):
    assert run("move-history", tmp_path / "new", "--state", tmp_path / "none").code == 3
    once(tmp_path, [GOOD], state="other")
    ended = run("move-history", tmp_path / "other", "--state", state)
    assert ended.code == 4
    assert "already; it is left untouched" in ended.err


def test_a_new_place_that_somebody_else_writes_is_named_at_once(tmp_path, state):
    (tmp_path / "new").mkdir()
    lock = WatchLock.take(tmp_path / "new")
    try:
        ended = run("move-history", tmp_path / "new", "--state", state, timeout=20)
    finally:
        lock.release()
    assert ended.code == 4
    assert f"{tmp_path / 'new'} is being written by process {os.getpid()}" in ended.err


@pytest.fixture
def watch(tmp_path, state):
    """A watch of that history, which looks for requests every second."""
    settings = settings_for(tmp_path / "player" / "smartctl", tmp_path, more='[io]\nevery = "1s"\n')
    with subprocess.Popen(
        [*COMMAND, "watch", "--state", str(state), "--settings", str(settings)],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        cwd=ROOT,
    ) as process:
        assert process.stdout is not None
        assert process.stdout.readline()
        yield process
        process.kill()


def until(true, *, seconds=30.0):
    end = time.monotonic() + seconds
    while not true():
        assert time.monotonic() < end, "it did not come to that"
        time.sleep(0.05)


def test_a_watch_that_runs_moves_it_itself_and_goes_on_at_the_new_place(tmp_path, state, watch):
    ended = run("move-history", tmp_path / "new", "--state", state)
    assert (ended.code, ended.err) == (0, "")
    until(lambda: watcher(tmp_path / "new") == watch.pid)
    assert run("tell", "inv1", "--label", "left", "--state", state).code == 0
    assert drives(tmp_path)["/dev/inv1"]["label"] == "left"
    watch.send_signal(signal.SIGTERM)
    assert watch.wait(30) == 0
    texts = [text for kind, text in book(tmp_path) if kind == "watch"]
    began, stopped, moved, again, over = [text[:13] for text in texts if "by the owner" not in text][-5:]
    assert (began, stopped, moved, again, over) == (
        "Watching bega",
        "Watching ende",
        "The history w",
        "Watching bega",
        "Watching ende",
    )


def test_a_watch_that_cannot_move_it_says_why_and_goes_on_where_it_was(tmp_path, state, watch):
    once(tmp_path, [GOOD], state="other")
    ended = run("move-history", tmp_path / "other", "--state", state)
    assert ended.code == 4
    assert "already; it is left untouched" in ended.err
    until(lambda: watcher(state) == watch.pid)
    assert run("tell", "inv1", "--label", "left", "--state", state).code == 0
    watch.send_signal(signal.SIGTERM)
    assert watch.wait(30) == 0


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root to become another user")
def test_without_the_right_it_ends_with_4_and_nothing_is_moved(tmp_path, state, capfd):
    child = os.fork()
    if child == 0:
        for folder in tmp_path.parents:
            if str(folder) != "/" and folder.owner() == "root" and folder.name.startswith("pytest"):
                folder.chmod(0o755)
        tmp_path.chmod(0o755)
        os.seteuid(65534)
        os._exit(main(["move-history", str(tmp_path / "new"), "--state", str(state)]))
    assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 4
    assert "run as" in capfd.readouterr().err
    assert (state / "history.db").exists()
