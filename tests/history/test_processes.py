import os
import subprocess
import sys
from dataclasses import replace

import pytest

from diskwatch.history import processes
from diskwatch.history.processes import Process, lives, this_process, written

ME = frozenset({os.geteuid()})
SOMEBODY = Process(pid=7, started=400, boot="an invented start")


@pytest.fixture
def proc(tmp_path, monkeypatch):
    """A ``/proc`` with one process in it."""
    (tmp_path / "sys/kernel/random").mkdir(parents=True)
    (tmp_path / "sys/kernel/random/boot_id").write_text("an invented start\n")
    (tmp_path / "7").mkdir()
    monkeypatch.setattr(processes, "_PROC", tmp_path)
    return tmp_path


def _tell(proc, *, name="python", state="S", started="400"):
    fields = [state, *["0"] * 18, started, "0", "0"]
    (proc / "7" / "stat").write_text(f"7 ({name}) {' '.join(fields)}\n")


def test_this_process_lives_and_is_told_from_others_of_its_number():
    me = this_process()
    assert me is not None
    assert me.pid == os.getpid()
    assert lives(me, ME)
    assert not lives(replace(me, started=me.started + 1), ME)
    assert not lives(replace(me, boot="another"), ME)


def test_a_child_that_has_ended_lives_no_more_buried_or_not():
    child = subprocess.Popen([sys.executable, "-c", "input()"], stdin=subprocess.PIPE)
    there = processes._seen(child.pid)
    assert there is not None
    assert lives(there, ME)
    child.kill()
    os.waitid(os.P_PID, child.pid, os.WEXITED | os.WNOWAIT)
    assert not lives(there, ME)
    child.communicate()
    assert not lives(there, ME)


def test_a_process_of_a_stranger_does_not_count(proc):
    _tell(proc)
    assert lives(SOMEBODY, ME)
    assert not lives(SOMEBODY, frozenset({os.geteuid() + 1}))


@pytest.mark.parametrize("name", ["a b", "7) S (", ") Z 1 2 3", "\udcff"])
def test_a_process_may_have_any_name(proc, name):
    (proc / "7" / "stat").write_text("")
    _tell(proc, name="x")
    text = (proc / "7" / "stat").read_text().replace("(x)", f"({name})")
    (proc / "7" / "stat").write_text(text, errors="surrogateescape")
    assert lives(SOMEBODY, ME)


@pytest.mark.parametrize("change", [{"state": "Z"}, {"state": "X"}, {"started": "401"}, {"started": "x"}])
def test_one_that_has_ended_or_started_at_another_time_does_not_live(proc, change):
    _tell(proc, **change)
    assert not lives(SOMEBODY, ME)


def test_what_cannot_be_seen_does_not_count(proc):
    assert not lives(SOMEBODY, ME)  # its folder is there, and what is in it is closed
    (proc / "7").rmdir()
    assert not lives(SOMEBODY, ME)
    assert this_process() is None


@pytest.mark.parametrize(
    "fields",
    [{}, {"pid": 7}, {"pid": 7, "started": 1}, {"pid": "7", "started": 1, "boot": "b"},
     {"pid": 7, "started": None, "boot": None}, {"pid": -1, "started": 1, "boot": "b"}],
)  # fmt: skip
def test_words_that_do_not_tell_one_process_from_others_name_none(fields):
    assert written(fields) is None


def test_words_that_tell_it_name_it():
    assert written({"pid": 7, "started": 400, "boot": "an invented start", "since": 3}) == SOMEBODY
