"""Days of traffic handed to the analyser once they are over: at most once a day and drive, whatever restarts.

A day is over an hour after its midnight, when its last traffic has long been committed. How far a drive has
come is kept in one transaction with what was learnt, so that no day is lost and none taken in twice. Nothing of
it stays in memory between two days.
"""

from contextlib import suppress
from dataclasses import dataclass

from diskwatch import analyser
from diskwatch.errors import DiskwatchError
from diskwatch.judge.service_times import times_lost
from diskwatch.records import Entry, IoRollup, KnownDrive, Learnt
from diskwatch.service.keeper import Keeper
from diskwatch.units import day_number

OVER = 3_600
"""Seconds after its midnight from which a day is over."""

BITE = 7
"""Days that a round takes in for a drive at most, after a long stop or on the first run on an old history."""

_Days = tuple[tuple[int, tuple[IoRollup, ...]], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Taken:
    """What days of traffic led to.

    Attributes:
        state: the drive's state after them.
        learnt: what its latency was learnt from, to be kept with that state; None where there was no such day.
        happened: what the day book should hold.
    """

    state: analyser.DriveState
    learnt: Learnt | None = None
    happened: tuple[Entry, ...] = ()


class Latency:
    """Looks for days that are over; remembers only where there are none left."""

    def __init__(self, keeper: Keeper) -> None:
        """Begin.

        Args:
            keeper: whose history; the one that the rounds use.
        """
        self._keeper = keeper
        self._nothing_before: dict[int, int] = {}

    def forget(self) -> None:
        """Look again: the history has become another."""
        self._nothing_before.clear()

    def take_in(self, known: KnownDrive, state: analyser.DriveState, at: int) -> Taken:
        """Take in what is over.

        Args:
            known: the drive, and where it is.
            state: its state.
            at: now, UTC seconds since 1970.
        """
        number, before = known.number, day_number(at - OVER)
        # What waits to be written holds the last day perhaps; to ask the file would take that day in twice.
        if self._nothing_before.get(number) == before or self._keeper.waiting:
            return Taken(state=state)
        found = None
        with suppress(DiskwatchError):  # what is wrong with the history is told when the round is kept
            found = self._keeper.ask(
                lambda history: (
                    kept := history.learnt(number),
                    history.traffic_days(number, after=_after(state, kept, before), before=before, most=BITE),
                )
            )
        if found is None:
            return Taken(state=state)
        kept, days = found
        if len(days) < BITE:
            self._nothing_before[number] = before
        return _taken(known, state, kept, days, at) if days else Taken(state=state)


def _after(state: analyser.DriveState, kept: Learnt | None, before: int) -> int | None:
    """The last day that was taken in; where the clock was set back behind it, all but the day just over."""
    known = [one for one in (state.traffic_through, None if kept is None else kept.through) if one is not None]
    newest = max(known, default=None)
    return before - 2 if newest is not None and newest >= before else newest


def _taken(known: KnownDrive, state: analyser.DriveState, kept: Learnt | None, days: _Days, at: int) -> Taken:
    happened: list[Entry] = []
    latency = analyser.no_latency()
    if kept is not None:
        try:
            latency = analyser.load_latency(kept.state)
        except ValueError:
            happened.append(Entry(at=at, drive=None, kind="trouble", text=times_lost()))
    key = circumstances(known)
    for day, rollups in days:
        step = analyser.take_in_traffic(state, latency, rollups, day=day, at=at, key=key)
        state, latency = step.state, step.latency
        happened += step.happened
    last = days[-1][0]
    return Taken(
        state=state,
        learnt=Learnt(through=last, state=analyser.dump_latency(latency)),
        happened=tuple(happened),
    )


def circumstances(known: KnownDrive) -> str:
    """What usual times hold for: the port, and the firmware. After a change of either they are learnt anew."""
    return f"{known.place.bay or known.place.device} {known.drive.firmware or ''}".rstrip()
