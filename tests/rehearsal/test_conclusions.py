"""Scenarios lived through by the real rounds and the real analyser; only the history is left out, for speed."""

import pytest

from diskwatch.records import Drive, KnownDrive, Place, Round
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course, Ended
from diskwatch.rehearsal.verdict import Verdict
from diskwatch.service.asking import InTurn
from diskwatch.service.rounds import Rounds

LONG = {"two-quiet-years"}
"""Lived through by the benchmark."""


class Memory:
    """Knows drives as a keeper does and keeps nothing else."""

    epoch = 0

    def __init__(self) -> None:
        self._known: dict[int, KnownDrive] = {}

    @property
    def known(self) -> tuple[KnownDrive, ...]:
        return tuple(self._known.values())

    def state(self, _number: int) -> None:
        return None

    def admit(self, drive: Drive, place: Place, at: int) -> KnownDrive:
        known = KnownDrive(number=len(self._known) + 1, drive=drive, place=place, first_seen=at)
        self._known[known.number] = known
        return known

    def record(self, finished: Round) -> None:
        for one in finished.drives:
            self._known[one.known.number] = one.known


def lived(name: str, **more: int) -> Ended:
    course = Course(scenarios.load(name), **more)
    keeper = Memory()
    rounds = Rounds(course.machine, keeper, course.clock.now, asking=InTurn)  # type: ignore[arg-type] # see Memory
    for _ in course.run(rounds.run, lambda: None):
        pass
    return course.ended()


@pytest.mark.parametrize("name", sorted(set(scenarios.names()) - LONG))
def test_what_a_scenario_expects_comes_true_or_is_told_as_not_yet_judged(name):
    ended = lived(name)
    got = {(one.serial, one.wish.because): (one.verdict, one.day) for one in ended.outcomes}
    for one in ended.outcomes:
        expected = Verdict.NOT_YET_JUDGED if one.wish.needs else Verdict.REACHED
        assert one.verdict is expected, got


def test_a_death_without_warning_has_no_counter_that_moved():
    story = lived("sudden-death").stories["INVENTED-NW-1301"]
    assert (story.failed, story.moved) == (True, {})
