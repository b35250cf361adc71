"""The course of a rehearsal: time passes, drives live, and at intervals somebody asks them.

Who asks and who keeps the answers is handed in, so that the very rounds that watch a real machine watch
this one.
"""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from diskwatch.records import DriveRound
from diskwatch.rehearsal.clock import START, Clock
from diskwatch.rehearsal.machine import InventedMachine
from diskwatch.rehearsal.scenario import Scenario
from diskwatch.rehearsal.story import Story
from diskwatch.rehearsal.verdict import Outcome, outcomes
from diskwatch.units import DAY

Ask = Callable[[], Iterable[DriveRound]]
Count = Callable[[], object]


@dataclass(frozen=True, slots=True, kw_only=True)
class Ended:
    """What a rehearsal came to.

    Attributes:
        scenario: what was rehearsed.
        seed: of chance.
        start: when it began, UTC seconds since 1970 of its own clock.
        end: when it ended.
        stories: what was said, by serial, in the scenario's order.
        outcomes: what became of what was expected.
    """

    scenario: Scenario
    seed: int
    start: int
    end: int
    stories: dict[str, Story]
    outcomes: tuple[Outcome, ...]


class Course:
    """One rehearsal."""

    def __init__(self, scenario: Scenario, *, seed: int | None = None, days: int | None = None) -> None:
        """Build the machine; no time passes yet.

        Args:
            scenario: what is rehearsed.
            seed: of chance; None for the scenario's own.
            days: how long; None for as long as the scenario lasts.
        """
        self.scenario = scenario
        self.seed = scenario.seed if seed is None else seed
        self.days = scenario.days if days is None else days
        self.clock = Clock(START)
        self.machine = InventedMachine(scenario, self.seed, self.clock)
        self._stories = {spec.serial: Story(serial=spec.serial, model=spec.model) for spec in scenario.drive}

    def run(self, ask: Ask, count: Count) -> Iterator[float]:
        """Live through it.

        Args:
            ask: one round of readings; gives each drive's part of it.
            count: one look at the traffic counters.

        Yields:
            After each step: days lived so far.
        """
        end = START + self.days * DAY
        every, due = self.scenario.every_hours * 3_600, START
        while self.clock.now() < end:
            self.machine.live()
            now = self.clock.now()
            if self.machine.on:
                if now >= due:
                    due = now - (now - START) % every + every
                    for one in ask():
                        self._take(one)
                count()
            yield self.clock.days()

    def _take(self, one: DriveRound) -> None:
        serial = one.known.drive.identity.serial
        if serial is not None and serial in self._stories:
            self._stories[serial].take(one)

    def ended(self) -> Ended:
        """What it came to so far."""
        for serial, story in self._stories.items():
            story.failed = not self.machine.drives[serial].alive
        end = self.clock.now()
        return Ended(
            scenario=self.scenario,
            seed=self.seed,
            start=START,
            end=end,
            stories=self._stories,
            outcomes=outcomes(self.scenario, self._stories, start=START, end=end),
        )
