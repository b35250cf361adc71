import os
import re
import signal
import subprocess
import time

import pytest

from diskwatch.cli.pace import Pace
from diskwatch.cli.scene import Scene
from diskwatch.errors import HistoryError
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course
from tests.cli.run import COMMAND, ROOT
from tests.cli.test_rehearse import SMALL


@pytest.fixture
def course(tmp_path):
    path = tmp_path / "small.toml"
    path.write_text(SMALL, encoding="utf-8")
    return Course(scenarios.load(str(path)))


def test_the_banner_tells_what_is_rehearsed_how_far_it_is_how_fast_and_that_it_is_invented(course):
    told = Scene(course, Pace(2.0)).banner()
    assert told == "Small, day 0 of 24, 2 days a second. Every drive here is invented (an invented test)."


def test_every_deed_tells_what_it_came_to(course):
    scene = Scene(course, Pace(2.0))
    assert scene.slower() == "Time: 1 day a second."
    assert scene.slower() == "Time: a day in 2 seconds."
    assert scene.faster() == "Time: 1 day a second."
    assert scene.halt() == "Time: standing still."
    assert scene.halt() == "Time: 1 day a second."
    assert "n for the next" in scene.step()


def test_what_ends_a_rehearsal_early_is_told_in_the_banner(course, tmp_path):
    scene = Scene(course, Pace(2.0))

    def full(*_: object) -> str:
        raise HistoryError("no space is left")

    scene.live(full, tmp_path)
    assert "it ended: no space is left" in scene.banner()
    scene = Scene(course, Pace(2.0))
    scene.live(lambda *_: None, tmp_path)
    assert "it is over" in scene.banner()


@pytest.mark.usefixtures("course")
def test_in_a_terminal_time_flows_and_leaving_tells_what_came_of_it(tmp_path):
    ours, theirs = os.openpty()
    child = subprocess.Popen(
        [*COMMAND, "rehearse", str(tmp_path / "small.toml"), "--speed", "30"],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        cwd=ROOT,
        env={**os.environ, "TERM": "xterm-256color", "COLUMNS": "100", "LINES": "30"},
    )
    os.close(theirs)
    drawn = b""

    def seen(pattern: bytes) -> bool:
        nonlocal drawn
        until = time.monotonic() + 30
        while not re.search(pattern, drawn) and time.monotonic() < until:
            drawn += os.read(ours, 65_536)
        return re.search(pattern, drawn) is not None

    try:
        assert seen(rb"INVENTED")
        assert seen(rb"day (1[0-9]|2[0-4]) of 24")
        os.write(ours, b"q")
        assert seen(rb"EVERYTHING HERE IS INVENTED")
        assert child.wait(20) == 0
    finally:
        if child.poll() is None:
            child.send_signal(signal.SIGKILL)
        child.wait()
        os.close(ours)
