import os
import re
import signal
import subprocess
import time
from typing import Any

import pytest

from diskwatch.cli.pace import Pace
from diskwatch.cli.rehearse import live_through
from diskwatch.cli.scene import Scene, show
from diskwatch.dashboard.head import is_stale
from diskwatch.errors import HistoryError
from diskwatch.history.reader import Past
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course
from tests.cli.run import COMMAND, ROOT
from tests.cli.test_rehearse import SMALL, open_folders


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


def test_the_traffic_of_the_step_that_was_lived_last_is_shown_and_none_once_the_machine_is_off(
    course, tmp_path
):
    scene = Scene(course, Pace(2.0))
    shown = []

    def look(*_: object) -> None:
        with Past.open(tmp_path) as past:
            shown.append([line.traffic for line in scene.shown(past.bays(course.clock.now())).drives])

    def one_step(course, folder, pace, seen):
        def both(spans):
            seen(spans)
            if spans:
                look()
                pace.end()

        trouble = live_through(course, folder, pace, both)
        seen(())
        look()
        return trouble

    scene.live(one_step, tmp_path)
    assert scene.trouble is None
    assert all(span is not None and span.seconds == 3600 for span in shown[0])
    assert shown[-1] == [None, None]


def test_however_fast_time_runs_no_figure_of_a_rehearsal_is_called_old(course, monkeypatch, tmp_path):
    asked: dict[str, Any] = {}

    class Screen:
        def __init__(self, *_: object, **words: object) -> None:
            asked.update(words)

        def run(self) -> None:
            pass

    monkeypatch.setattr("diskwatch.dashboard.app.Dashboard", Screen)
    monkeypatch.setattr("diskwatch.cli.scene.end_with_terminal", lambda _: None)
    show(course, tmp_path, Pace(None), live_through, kept=True)
    with Past.open(tmp_path) as past:
        assert not is_stale(past.bays(0), course.clock.now() + course.days * 86_400, asked["every"])


def terminal(path, *words):
    """The command in a terminal that is not its controlling one, so that no signal tells when it goes."""
    ours, theirs = os.openpty()
    child = subprocess.Popen(
        [*COMMAND, "rehearse", str(path), *words],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        cwd=ROOT,
        start_new_session=True,
        env={**os.environ, "TERM": "xterm-256color", "COLUMNS": "100", "LINES": "30"},
    )
    os.close(theirs)
    return ours, child


@pytest.mark.usefixtures("course")
def test_a_terminal_that_goes_away_takes_the_temporary_history_with_it(tmp_path):
    ours, child = terminal(tmp_path / "small.toml", "--speed", "1")
    try:
        drawn, until = b"", time.monotonic() + 30
        while b"INVENTED" not in drawn and time.monotonic() < until:
            drawn += os.read(ours, 65_536)
        held = open_folders(child.pid)
        os.close(ours)
        child.wait(20)
    finally:
        if child.poll() is None:
            child.kill()
            child.wait()
    assert held
    assert not any(folder.exists() for folder in held)


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
