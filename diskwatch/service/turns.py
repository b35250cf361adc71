"""Whose turn it is in a round: remembers for `diskwatch.service.pace` what came of asking each drive."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from diskwatch.machine.counters import completed
from diskwatch.machine.protocol import Counted, Found
from diskwatch.records import Outcome
from diskwatch.service import pace
from diskwatch.service.pace import Asked, Seen, Why


def _none() -> frozenset[str]:
    return frozenset()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Memory:
    """What came of asking a drive, and how many requests it had completed when it had been asked."""

    asked: Asked
    done: int | None


class Turns:
    """Belongs to the thread of the rounds."""

    def __init__(self, *, every: float = 0.0, hung: Callable[[], frozenset[str]] = _none) -> None:
        """Remember nothing: the first round asks every drive that is awake.

        Args:
            every: seconds between two rounds.
            hung: kernel names of the block devices whose requests do not move.
        """
        self._every = every
        self._hung = hung
        self._memory: dict[str, _Memory] = {}
        self._now: dict[str, tuple[Seen, int | None, tuple[str, ...]]] = {}

    def plan(
        self, drives: Mapping[str, Found], totals: Mapping[str, Counted], *, at: int, everyone: bool = False
    ) -> Mapping[str, Why]:
        """Decide for each drive of a round; what is no longer there is forgotten.

        Args:
            drives: by a key that stays the same as long as one device stands under a name.
            totals: the kernel's counters, by the names of block devices.
            at: UTC seconds since 1970.
            everyone: whether all are to be asked, whatever was before.
        """
        hung = self._hung()
        self._memory = {key: one for key, one in self._memory.items() if key in drives}
        self._now = {}
        turns: dict[str, Why] = {}
        for key, found in drives.items():
            memory, done = self._memory.get(key), _completed(found.blocks, totals)
            before = memory.done if memory is not None else None
            seen = Seen(
                at=at,
                every=self._every,
                kind=found.drive.kind,
                worked=None if done is None or before is None else done != before,
                asleep=found.asleep,
                hung=not hung.isdisjoint(found.blocks),
                wanted=everyone,
            )
            self._now[key] = seen, done, found.blocks
            turns[key] = pace.turn(memory.asked if memory is not None else None, seen)
            if memory is not None and not turns[key].ask:
                self._memory[key] = _Memory(asked=pace.left_out(memory.asked), done=memory.done)
        return turns

    def forget(self) -> None:
        """Begin anew: the next round asks every drive that is awake."""
        self._memory.clear()

    def answered(self, key: str, outcome: Outcome, totals: Mapping[str, Counted]) -> None:
        """Take in how asking a drive of this round ended.

        Args:
            key: the drive's.
            outcome: how it ended.
            totals: the kernel's counters now. The kernel may have been told to count questions too; what a
                question moved is no work of the drive, or asking it would keep it awake for ever.
        """
        if key not in self._now:
            return
        seen, before, blocks = self._now[key]
        after = _completed(blocks, totals)
        done = before if after is None else after
        memory = self._memory.get(key)
        if not seen.asleep:  # then the machine answered in its stead
            asked = pace.after(memory.asked if memory is not None else None, seen, outcome)
            self._memory[key] = _Memory(asked=asked, done=done)


def _completed(blocks: tuple[str, ...], totals: Mapping[str, Counted]) -> int | None:
    """Requests that a drive has completed so far; None where the kernel does not say for all of it."""
    if not blocks or any(block not in totals for block in blocks):
        return None
    return sum(completed(totals[block].counts) for block in blocks)
