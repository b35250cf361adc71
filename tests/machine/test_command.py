import contextlib
import fcntl
import os
import signal
import subprocess
import sys
import threading
import time
from collections.abc import Sequence
from pathlib import Path

import pytest

from diskwatch.machine import command
from diskwatch.machine.command import Answer, Door, Ending


def script(folder: Path, body: str, name: str = "tool") -> str:
    path = folder / name
    path.write_text(f"#!/bin/sh\n{body}\n")
    path.chmod(0o755)
    return str(path)


def test_output_errors_and_exit_status_come_back_apart(tmp_path: Path):
    tool = script(tmp_path, "echo said; echo complained >&2; exit 68")
    answer = Door().run([tool], timeout=10)
    assert answer == Answer(ending=Ending.ENDED, status=68, out=b"said\n", err=b"complained\n")


def test_arguments_reach_the_command_unchanged_and_no_shell_sees_them(tmp_path: Path):
    tool = script(tmp_path, 'printf "%s|" "$@"')
    answer = Door().run([tool, "-d", "megaraid,7", "$HOME; echo gone", "/dev/bus/0"], timeout=10)
    assert answer.out == b"-d|megaraid,7|$HOME; echo gone|/dev/bus/0|"


def test_the_command_runs_in_the_c_locale_with_nothing_to_read_and_in_its_own_group(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    monkeypatch.setenv("LC_ALL", "de_DE.UTF-8")
    tool = script(
        tmp_path,
        'read line; echo "$LC_ALL:$line:$(ps -o pgid= -p $$ 2>/dev/null || cut -d" " -f5 /proc/$$/stat)"',
    )
    locale, line, group = Door().run([tool], timeout=10).out.decode().strip().split(":")
    assert (locale, line) == ("C", "")
    assert int(group) != os.getpgid(0)
    assert os.environ["LC_ALL"] == "de_DE.UTF-8"


def test_a_command_on_path_is_found_by_its_name(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    script(tmp_path, "echo found", name="tool-of-the-test")
    monkeypatch.setenv("PATH", str(tmp_path))
    assert Door().run(["tool-of-the-test"], timeout=10).out == b"found\n"


def test_a_command_of_the_system_is_found_though_an_ordinary_users_path_lacks_its_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    """On Debian smartctl lies in /usr/sbin, which only root has on PATH."""
    sbin = tmp_path / "sbin"
    sbin.mkdir()
    script(sbin, "echo found", name="tool-of-the-test")
    monkeypatch.setenv("PATH", "/usr/bin:/bin")
    assert Door().run(["tool-of-the-test"], timeout=10).ending is Ending.MISSING
    assert "/usr/sbin" in command._SBIN.split(":")
    monkeypatch.setattr(command, "_SBIN", f"{command._SBIN}:{sbin}")
    assert Door().run(["tool-of-the-test"], timeout=10).out == b"found\n"


def test_a_hanging_command_is_killed_in_time_with_its_children(tmp_path: Path):
    trace = tmp_path / "alive"
    tool = script(tmp_path, f"echo begun; (sleep 1; echo alive > {trace}) & sleep 60")
    begun = time.monotonic()
    door = Door()
    answer = door.run([tool], timeout=0.3)
    assert time.monotonic() - begun < 3
    assert (answer.ending, answer.status, answer.out) == (Ending.TIMED_OUT, None, b"begun\n")
    time.sleep(1.1)
    assert not trace.exists()
    assert door.abandoned == 0


def test_a_command_that_trickles_for_ever_is_killed_in_time(tmp_path: Path):
    tool = script(tmp_path, "while :; do echo drop; done")
    begun = time.monotonic()
    assert Door(limit=10**9).run([tool], timeout=0.3).ending is Ending.TIMED_OUT
    assert time.monotonic() - begun < 3


def test_a_command_that_closes_its_output_and_lives_on_is_killed_in_time(tmp_path: Path):
    tool = script(tmp_path, "exec >&- 2>&-; sleep 60")
    assert Door().run([tool], timeout=0.3).ending is Ending.TIMED_OUT


@pytest.mark.parametrize("apart", ["", "setsid "])
def test_the_answer_of_a_command_that_has_ended_is_whole_though_a_helper_of_it_holds_its_output(
    tmp_path: Path, apart: str
):
    helper = tmp_path / "helper"
    begin = f"{apart}sh -c 'echo $$ > {helper}; exec sleep 30' & while [ ! -s {helper} ]; do sleep 0.02; done"
    tool = script(tmp_path, f"{begin}; echo said; exit 4")
    begun = time.monotonic()
    answer = Door().run([tool], timeout=20)
    assert time.monotonic() - begun < 5
    assert answer == Answer(ending=Ending.ENDED, status=4, out=b"said\n")
    if apart:
        os.kill(int(helper.read_text()), signal.SIGKILL)
    else:
        assert is_gone(int(helper.read_text()))


def test_what_a_helper_still_says_shortly_after_the_command_has_ended_is_heard(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    monkeypatch.setattr(command, "_LINGER", 10.0)  # a busy computer must not decide what this test sees
    tool = script(tmp_path, "(sleep 0.4; echo late) & echo said")
    assert Door().run([tool], timeout=20).out == b"said\nlate\n"


def test_a_helper_that_talks_on_for_ever_neither_holds_the_answer_nor_spoils_its_status(tmp_path: Path):
    tool = script(tmp_path, "(while :; do echo drop; sleep 0.05; done) & exit 3")
    begun = time.monotonic()
    answer = Door().run([tool], timeout=20)
    assert time.monotonic() - begun < 5
    assert (answer.ending, answer.status) == (Ending.ENDED, 3)


def is_gone(process: int) -> bool:
    """Whether a killed process ends; who takes it up, and when, is not ours to say."""
    for _ in range(100):
        try:
            state = Path(f"/proc/{process}/stat").read_text().rpartition(") ")[2][0]
        except FileNotFoundError:
            return True
        if state == "Z":
            return True
        time.sleep(0.02)
    return False


def test_a_child_that_even_sigkill_does_not_end_is_left_behind_and_counted_until_it_goes(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    # What the kernel does with a child in an uninterruptible call: the signal is taken, and nothing happens.
    monkeypatch.setattr("diskwatch.machine.command._kill", lambda _child: None)
    tool = script(tmp_path, "exec sleep 1.2")
    door = Door(grace=0.1)
    begun = time.monotonic()
    assert door.run([tool], timeout=0.2, owner="this drive").ending is Ending.TIMED_OUT
    assert time.monotonic() - begun < 1.0
    assert door.abandoned == 1
    assert door.run([tool], timeout=0.2, owner="this drive").ending is Ending.HELD
    assert door.run([script(tmp_path, "exit 0", "other")], timeout=5, owner="another").status == 0
    deadline = time.monotonic() + 10
    while door.abandoned and time.monotonic() < deadline:
        time.sleep(0.05)
    assert door.abandoned == 0
    assert door.run([script(tmp_path, "exit 0", "again")], timeout=5, owner="this drive").status == 0


@pytest.fixture
def held_tool(tmp_path: Path):
    """A command whose start takes as long as on a disk that hangs: a lease keeps the kernel from opening it."""
    tool = script(tmp_path, "echo begun", "held")
    before = signal.signal(signal.SIGIO, signal.SIG_IGN)
    held = os.open(tool, os.O_RDWR)
    try:
        try:
            fcntl.fcntl(held, fcntl.F_SETLEASE, fcntl.F_WRLCK)
        except OSError:
            pytest.skip("this file system grants no leases")
        yield tool, held
    finally:
        with contextlib.suppress(OSError):  # the test lets go of it
            os.close(held)
        signal.signal(signal.SIGIO, before)


def test_a_command_that_cannot_even_be_started_holds_nobody_and_is_counted_until_it_can(
    tmp_path: Path, held_tool: tuple[str, int]
):
    tool, held = held_tool
    door = Door()
    begun = time.monotonic()
    assert door.run([tool], timeout=0.2, owner="this drive").ending is Ending.TIMED_OUT
    assert time.monotonic() - begun < 2
    assert door.abandoned == 1
    assert door.run([tool], timeout=0.2, owner="this drive").ending is Ending.HELD
    assert door.run([script(tmp_path, "exit 0", "other")], timeout=5, owner="another").status == 0
    os.close(held)
    deadline = time.monotonic() + 10
    while door.abandoned and time.monotonic() < deadline:
        time.sleep(0.05)
    assert door.abandoned == 0


@pytest.mark.parametrize("stopped", [False, True])
def test_a_command_whose_start_outlives_its_limit_is_killed_as_soon_as_it_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, stopped: bool
):
    started: list[subprocess.Popen[bytes]] = []
    may_start, start = threading.Event(), command._child

    def slow(argv: Sequence[str]) -> subprocess.Popen[bytes]:
        may_start.wait(10)
        started.append(start(argv))
        return started[0]

    monkeypatch.setattr(command, "_child", slow)
    door = Door()
    assert door.run([script(tmp_path, "exec sleep 60")], timeout=0.05).ending is Ending.TIMED_OUT
    if stopped:
        door.stop()
    may_start.set()
    deadline = time.monotonic() + 10
    while not (started and started[0].returncode is not None) and time.monotonic() < deadline:
        time.sleep(0.01)
    assert started[0].returncode == -signal.SIGKILL


def test_stop_takes_up_those_whom_the_kernel_has_let_go_of(tmp_path: Path):
    child = command._child([script(tmp_path, "exit 0")])
    for pipe in (child.stdout, child.stderr):
        assert pipe is not None
        pipe.close()
    os.waitid(os.P_PID, child.pid, os.WEXITED | os.WNOWAIT)
    door = Door()
    door._left_behind.append(("", child))
    door.stop()
    assert (child.returncode, door._left_behind) == (0, [])


def test_a_missing_command_is_told_from_one_that_may_not_be_run_and_from_one_that_fails(tmp_path: Path):
    flat = tmp_path / "flat"
    flat.write_text("no program")
    broken = tmp_path / "broken"
    broken.write_bytes(b"\x00\x01\x02")
    broken.chmod(0o755)
    door = Door()
    assert door.run([str(tmp_path / "none")], timeout=1).ending is Ending.MISSING
    assert door.run(["no-such-command-anywhere"], timeout=1).ending is Ending.MISSING
    assert door.run([str(flat)], timeout=1).ending is Ending.NOT_EXECUTABLE
    assert door.run([str(tmp_path)], timeout=1).ending is Ending.NOT_EXECUTABLE
    assert door.run([str(broken)], timeout=1).ending is Ending.NOT_EXECUTABLE
    assert door.run([script(tmp_path, "exit 1")], timeout=5).status == 1
    assert door.run(["a\0b"], timeout=1).ending is Ending.NOT_STARTED


def test_endless_output_is_cut_off_and_the_command_killed():
    answer = Door(limit=100_000).run([sys.executable, "-c", "while True: print('x' * 1000)"], timeout=30)
    assert answer.ending is Ending.TOO_MUCH
    assert 100_000 < len(answer.out) < 300_000


def test_large_output_within_the_limit_comes_whole():
    answer = Door().run([sys.executable, "-c", "print('x' * 3_000_000)"], timeout=30)
    assert (answer.ending, len(answer.out)) == (Ending.ENDED, 3_000_001)


def test_stop_ends_what_runs_from_another_thread_and_refuses_what_comes_later(tmp_path: Path):
    tool = script(tmp_path, "echo begun; exec sleep 60")
    door = Door()
    answers: list[Answer] = []
    asking = threading.Thread(target=lambda: answers.append(door.run([tool], timeout=60)))
    asking.start()
    deadline = time.monotonic() + 10
    while not door._running and time.monotonic() < deadline:
        time.sleep(0.01)
    door.stop()
    asking.join(10)
    assert answers[0].ending is Ending.STOPPED
    assert door.run([tool], timeout=60) == Answer(ending=Ending.STOPPED)


def test_a_command_killed_by_a_signal_gives_that_as_a_negative_status(tmp_path: Path):
    assert Door().run([script(tmp_path, "kill -SEGV $$")], timeout=10).status == -11
