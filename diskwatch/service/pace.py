"""How often a drive is asked: policy alone, without clock or machine. Pure.

Asking is not free: it may keep a drive from falling asleep, and a drive that hangs takes a process with it. So
a drive is left out of a round where asking could do harm or bring nothing.
"""

from dataclasses import dataclass, replace
from enum import StrEnum

from diskwatch.records import Kind, Outcome
from diskwatch.units import DAY

IDLE_TIMER = 1_800
"""Seconds without work after which drives usually fall asleep, where they do (common practice, no source)."""

_AWAKE_ALWAYS = frozenset({Kind.NVME, Kind.VIRTUAL})
"""What asking keeps from no sleep: no motor, and power states that begin within a second."""


class Why(StrEnum):
    """Why a drive is asked in this round, or left out of it.

    FIRST: it has not been asked since the watch began, or since it was plugged in. WANTED: somebody wants all
    drives asked now. DUE: it is its turn. ASLEEP: the kernel has suspended it. HUNG: its requests do not move.
    SILENT: it timed out and gets more time. IDLE: it did nothing since it was asked last, and shall be able to
    fall asleep.
    """

    FIRST = "first"
    WANTED = "wanted"
    DUE = "due"
    ASLEEP = "asleep"
    HUNG = "hung"
    SILENT = "silent"
    IDLE = "idle"

    @property
    def ask(self) -> bool:
        """Whether it is asked."""
        return self in {Why.FIRST, Why.WANTED, Why.DUE}

    @property
    def told(self) -> str | None:
        """Why it was left out, one sentence about "it"; None where it was not, or where its pass says why."""
        return _TOLD.get(self)


_TOLD = {
    Why.HUNG: "It is not asked, since its requests do not move and one more would hang as well.",
    Why.SILENT: "It is asked less often, since it gave no answer when it was asked last.",
    Why.IDLE: "It is asked again later, since it did nothing since it was asked last and may fall asleep.",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """What is remembered of a drive between rounds.

    Attributes:
        at: when it was last asked, UTC seconds since 1970.
        left_out: rounds since then that it was left out of.
        timeouts: how often it timed out since the last reading.
        idle: how often in a row it was asked although it had done nothing.
    """

    at: int
    left_out: int = 0
    timeouts: int = 0
    idle: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """What is known of a drive when a round begins, without asking it.

    Attributes:
        at: the present, UTC seconds since 1970.
        every: seconds between two rounds.
        kind: what sort of device.
        worked: whether it completed a request since it was last asked; None where the kernel does not say.
        asleep: whether the kernel has suspended it.
        hung: whether its requests do not move.
        wanted: whether somebody wants all drives asked now.
    """

    at: int
    every: float
    kind: Kind
    worked: bool | None = None
    asleep: bool = False
    hung: bool = False
    wanted: bool = False


def turn(asked: Asked | None, seen: Seen) -> Why:
    """Whether a drive is asked in this round, and why.

    A drive that is awake and moves is asked at least once a day. One that timed out is left out of 1, 3, 7, …
    rounds. One that did nothing is first asked again after twice the usual idle timer, then after twice as long
    each time: whatever its own timer, asking does not keep it awake for ever.

    Args:
        asked: what is remembered of it; None where it has not been asked yet.
        seen: what is known now.
    """
    if seen.asleep:
        return Why.ASLEEP
    if asked is None:
        return Why.FIRST
    if seen.hung:
        return Why.HUNG
    if seen.wanted:
        return Why.WANTED
    gone = seen.at - asked.at
    # A clock that was set back says nothing of how long it was; then it is asked.
    if gone < 0 or gone + seen.every >= DAY:
        return Why.DUE
    if asked.left_out + 1 < 2**asked.timeouts:
        return Why.SILENT
    if seen.worked is False and seen.kind not in _AWAKE_ALWAYS and gone < idle_gap(asked):
        return Why.IDLE
    return Why.DUE


def idle_gap(asked: Asked) -> int:
    """Seconds for which a drive that does nothing is left alone; a day at most."""
    return int(min(2 * IDLE_TIMER * 2**asked.idle, DAY))


def after(asked: Asked | None, seen: Seen, outcome: Outcome) -> Asked:
    """What to remember once a drive was asked.

    Args:
        asked: what was remembered before.
        seen: what was known when it was asked.
        outcome: how it ended. After a time-out only a reading, or the word that there is none to be had, proves
            that the drive answers again.
    """
    before = asked if asked is not None else Asked(at=seen.at)
    timeouts = before.timeouts
    if outcome is Outcome.TIMED_OUT:
        timeouts += 1
    elif outcome in {Outcome.READ, Outcome.NO_SMART}:
        timeouts = 0
    idle = before.idle + 1 if asked is not None and seen.worked is False else 0
    return Asked(at=seen.at, timeouts=timeouts, idle=idle)


def left_out(asked: Asked) -> Asked:
    """What to remember once a drive was left out of a round."""
    return replace(asked, left_out=asked.left_out + 1)
