"""What the screens ask beside the drives themselves, and the records that answer: frozen, ready to be drawn.

Whoever opens the dashboard hands the answers in, so that this room neither judges nor asks a drive.
"""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field
from typing import Protocol

from diskwatch.records import Bays, Entry, Margin


@dataclass(frozen=True, slots=True, kw_only=True)
class Chapter:
    """One part of a long answer.

    Attributes:
        title: what it is about, without a colon.
        lines: whole sentences.
        numbered: whether their order matters.
    """

    title: str
    lines: tuple[str, ...]
    numbered: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Strand:
    """A drive's past and what is to be expected of it, for its line through time.

    Attributes:
        evidence: the strongest evidence of any of its ledgers as ``(UTC day number, M in days)``, oldest first.
        margin: the time left until its first limit, in days from now.
    """

    evidence: tuple[tuple[int, float], ...] = ()
    margin: Margin = field(default_factory=Margin)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ahead:
    """What is to be expected of a signal.

    Attributes:
        limit: the value in question.
        low: days from now until it may be reached.
        high: days from now until it should have been; None where there is no upper end.
    """

    limit: float
    low: float
    high: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Curve:
    """One signal over a span of time.

    Attributes:
        signal: its name.
        words: what it counts or measures, for a person.
        unit: its unit.
        now: its value as last read, a number or a word; None where it is not known.
        since: when it was first seen at this value, UTC seconds since 1970.
        evidence: M in days; None where no ledger follows it.
        points: ``(at, value)``, oldest first; each value holds until the next one.
        gaps: spans ``(from, until)`` in which nothing was read.
        usual: the range it kept to for nine tenths of the time; None where too little is known.
        fit: two points ``(at, value)`` of the straight line through it; None where it stands still.
        ahead: what is forecast of it; None where nothing is.
        held: whether a value holds until the next one was read as another (a count), or moves all the time.
    """

    signal: str
    words: str
    unit: str
    now: int | str | None
    since: int
    evidence: float | None
    points: tuple[tuple[int, float], ...] = ()
    gaps: tuple[tuple[int, int], ...] = ()
    usual: tuple[float, float] | None = None
    fit: tuple[tuple[int, float], tuple[int, float]] | None = None
    ahead: Ahead | None = None
    held: bool = True


class Questions(Protocol):
    """All that can be asked; each may raise `DiskwatchError`, and is asked in the one asking thread."""

    def strands(self, bays: Bays) -> Mapping[int, Strand]:
        """Each drive's line through time, by its number."""

    def why(self, number: int, at: int) -> tuple[Chapter, ...]:
        """The chain from a drive's readings to its call, and what would change it."""

    def plan(self, number: int, at: int) -> tuple[Chapter, ...]:
        """What is at stake on a drive, and how to get it off."""

    def curves(self, number: int, since: int, at: int) -> tuple[Curve, ...]:
        """Every signal of a drive from ``since`` to ``at``, those that move first."""

    def day_book(self, drive: int | None, kinds: Collection[str] | None, limit: int) -> tuple[Entry, ...]:
        """The newest so many things that happened, oldest first."""

    def ticket(self, number: int, hide: Collection[str], at: int) -> str:
        """The ticket of a drive as one page of text."""

    def save(self, number: int, hide: Collection[str], at: int) -> str:
        """Write the ticket of a drive to a file; tells where in one sentence."""

    def put_off(self, number: int, at: int) -> str:
        """Put this user's notices about a drive off; tells until when in one sentence."""


class Stage(Protocol):
    """A rehearsal that goes on while it is looked at; every deed tells what it came to in one sentence."""

    def banner(self) -> str:
        """What is rehearsed, how far it is, how fast it goes."""

    def slower(self) -> str:
        """Let time pass half as fast."""

    def faster(self) -> str:
        """Let time pass twice as fast."""

    def halt(self) -> str:
        """Let time stand still, or go on."""

    def step(self) -> str:
        """Let one day pass, then stand still."""
