"""Scenarios lived through by the real rounds, traffic, analyser and history, as the command joins them."""

import os
import tempfile
from pathlib import Path

import pytest

from diskwatch.cli.rehearse import live_through
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course, Ended
from diskwatch.rehearsal.verdict import Verdict

LONG = {"two-quiet-years"}
"""Lived through by the benchmark."""


ALSO = {"loose-cable": 21, "scratched-media": 21, "weak-head": 21}
"""Scenarios lived with another seed than their own as well; the benchmark does so with twenty, for all."""


def lived(name: str, **more: int) -> Ended:
    course = Course(scenarios.load(name), **more)
    memory = "/dev/shm" if os.access("/dev/shm", os.W_OK) else None  # noqa: S108 - a folder of its own is made in it
    with tempfile.TemporaryDirectory(dir=memory) as folder:
        assert live_through(course, Path(folder), None) is None
    return course.ended()


@pytest.mark.parametrize(
    ("name", "seed"), [*((name, None) for name in sorted(set(scenarios.names()) - LONG)), *ALSO.items()]
)
def test_what_a_scenario_expects_comes_true(name, seed):
    ended = lived(name) if seed is None else lived(name, seed=seed)
    got = {(one.serial, one.wish.because): (one.verdict, one.day) for one in ended.outcomes}
    for one in ended.outcomes:
        assert one.verdict is Verdict.REACHED, got


def test_a_death_without_warning_has_no_counter_that_moved():
    story = lived("sudden-death").stories["INVENTED-NW-1301"]
    assert (story.failed, story.moved) == (True, {})
