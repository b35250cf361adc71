"""What was seen without a history, joined to one that comes into reach late: its numbers, past and counts.

A watch that cannot read its history counts drives from one and judges them as new. When the history is there,
or another one is put in its place, what waits is of other numbers, and was judged without that past. Nothing of
it is given up: each drive is recognised, and its passes are judged again from the state that the history holds.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from diskwatch import analyser
from diskwatch.history.writer import History
from diskwatch.machine import identity
from diskwatch.records import (
    KERNEL_LOG,
    DriveRound,
    Entry,
    KnownDrive,
    Listened,
    Pass,
    Round,
    SignalKind,
    Value,
)
from diskwatch.service.waiting import Notes, Traffic, Write

LAST_SECTOR = "last-unreadable-sector"
"""The one thing heard that is no count."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Joined:
    """What came of it.

    Attributes:
        known: all drives, with the numbers that they have from now on.
        states: their states as text.
        writes: what waits, in the history's own numbers.
        numbers: the number that each drive has from now on, by the one that it had.
    """

    known: Mapping[int, KnownDrive]
    states: Mapping[int, str]
    writes: tuple[Write, ...]
    numbers: Mapping[int, int]


def strangers(there: Mapping[int, KnownDrive], here: Mapping[int, KnownDrive]) -> bool:
    """Whether a number means one drive in the history and another one here."""
    return any(there[number].first_seen != here[number].first_seen for number in there.keys() & here.keys())


def join(history: History, here: Mapping[int, KnownDrive], waiting: Iterable[Write]) -> Joined:
    """Join what waits to the past of a history; nothing is written.

    Args:
        history: with its past.
        here: the drives by the numbers that they were given without it.
        waiting: what waits, oldest first.

    Raises:
        HistoryError: the history cannot be read.
    """
    there = {one.number: one for one in history.known()}
    joining = _Joining(history, _recognised(there, here), frozenset(there))
    writes = tuple(joining.joined(write) for write in waiting)
    known = {one.number: one for one in joining.numbers.values()}
    return Joined(
        known=there | known,
        states=joining.states,
        writes=writes,
        numbers={before: now.number for before, now in joining.numbers.items()},
    )


def _recognised(there: Mapping[int, KnownDrive], here: Mapping[int, KnownDrive]) -> dict[int, KnownDrive]:
    """Each drive as it is called in the history, by the number that it had without it."""
    free = list(there.values())
    numbers: dict[int, KnownDrive] = {}
    last = max(there, default=0)
    for number, one in sorted(here.items()):
        found = identity.recognise(one.drive.identity, free)
        if found is None:
            last += 1
            numbers[number] = replace(one, number=last)
        else:
            free.remove(found)
            numbers[number] = replace(one, number=found.number, first_seen=found.first_seen)
    return numbers


class _Joining:
    """Puts one write after the other into the history's terms."""

    def __init__(self, history: History, numbers: Mapping[int, KnownDrive], met: frozenset[int]) -> None:
        self._history = history
        self.numbers = numbers
        self._met = met
        self.states = dict(history.states())
        self._totals = history.heard_totals()
        self._again: dict[int, Mapping[str, int]] = {}

    def joined(self, write: Write) -> Write:
        match write:
            case Round():
                return self._round(write)
            case Listened():
                return self._listened(write)
            case Traffic():
                spans = tuple(replace(one, drive=self._number(one.drive)) for one in write.spans)
                return replace(write, spans=spans)
            case Notes():
                return replace(write, entries=self._entries(write.entries))

    def _number(self, number: int) -> int:
        return self.numbers[number].number if number in self.numbers else number

    def _entries(self, entries: Iterable[Entry]) -> tuple[Entry, ...]:
        return tuple(
            entry if entry.drive is None else replace(entry, drive=self._number(entry.drive))
            for entry in entries
        )

    def _round(self, write: Round) -> Round:
        parts: list[DriveRound] = []
        entries: list[Entry] = []
        for part in write.drives:
            now, happened = self._part(part)
            parts.append(now)
            entries += happened
        # What was said of them as of drives that are new is told anew, from what is known of them.
        again = {part.known.number for part in parts} & self._met
        told = tuple(entry for entry in self._entries(write.entries) if entry.drive not in again)
        return replace(write, drives=tuple(parts), entries=(*told, *entries))

    def _part(self, part: DriveRound) -> tuple[DriveRound, tuple[Entry, ...]]:
        mine = self.numbers.get(part.known.number, part.known)
        known = replace(part.known, number=mine.number, first_seen=mine.first_seen)
        if known.number not in self._met:
            if part.state is not None:
                self.states[known.number] = part.state
            return replace(part, known=known), ()
        pass_ = replace(part.pass_, heard=self._counted_on(part.known.number, part.pass_))
        step = analyser.advance(self._state(known.number), pass_)
        self.states[known.number] = analyser.dump(step.state)
        now = DriveRound(
            known=known,
            pass_=pass_,
            state=self.states[known.number],
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        return now, tuple(replace(entry, drive=known.number) for entry in step.happened)

    def _state(self, number: int) -> analyser.DriveState:
        kept = self.states.get(number)
        return analyser.start() if kept is None else analyser.load(kept)

    def _listened(self, write: Listened) -> Listened:
        kept = self._history.left_off(write.source)
        if (
            kept is not None
            and kept[0].log == write.left_off.log
            and kept[0].sequence >= write.left_off.sequence
        ):
            # Heard before already, when the history was in reach: counted and told once is enough.
            self._again |= write.totals
            return replace(write, left_off=kept[0], gathered=kept[1], totals={}, entries=())
        totals = {
            self._number(number): {signal: self._on(number, signal, count) for signal, count in counts.items()}
            for number, counts in write.totals.items()
        }
        return replace(write, totals=totals, entries=self._entries(write.entries))

    def _counted_on(self, number: int, pass_: Pass) -> tuple[Value, ...]:
        return tuple(
            replace(one, value=self._on(number, one.signal, one.value))
            if one.source == KERNEL_LOG and one.kind is SignalKind.COUNT and isinstance(one.value, int)
            else one
            for one in pass_.heard
        )

    def _on(self, number: int, signal: str, count: int) -> int:
        """A count that began at none, on top of what was counted before."""
        if signal == LAST_SECTOR:
            return count
        before = self._totals.get(self._number(number), {}).get(signal, 0)
        return count + max(0, before - self._again.get(number, {}).get(signal, 0))
