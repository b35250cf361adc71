"""What the drives of one machine tell of each other: trouble that several have at once, and trouble of a bay.

Drives share a power strip, a supply, the air and a controller. Where they have the same trouble on the same
days, the trouble is more likely in what they share than in each of them. Where a drive has the trouble that
another had in the same bay before it, the trouble is more likely the bay's: its cable or port. Days are held
against each other, not moments, since drives are asked at intervals. How many days it takes is a proposal; no
source.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from enum import StrEnum

WINDOW = 30
"""Days that trouble counts as recent."""

SHARED_DAYS = 3
"""Days with the same trouble on several drives that count: one power cut, or one hot day, hits every drive."""

SHARED_PART = 2 / 3
"""Part of a drive's own days of trouble that must be shared; what it has alone as often is its own."""

REMEMBERED = 365
"""Days that a bay's trouble with another drive is remembered."""


class Trouble(StrEnum):
    """Trouble that may come from what drives share.

    POWER went away without notice; RETRACT: heads retracted in an emergency, which only bears witness to that;
    LINK: transfers were damaged, or the link was reset; TIMEOUT: commands went unanswered; HEAT: at or above
    its own limit; GONE: it was not there, or did not answer.
    """

    POWER = "power"
    RETRACT = "retract"
    LINK = "link"
    TIMEOUT = "timeout"
    HEAT = "heat"
    GONE = "gone"


_BESIDE: Mapping[Trouble, frozenset[Trouble]] = {
    **{kind: frozenset({kind}) for kind in Trouble},
    Trouble.POWER: frozenset({Trouble.POWER, Trouble.RETRACT}),
    Trouble.RETRACT: frozenset({Trouble.POWER}),
}
"""What each kind is held against on other drives."""

Days = Mapping[str, tuple[int, ...]]
"""UTC day numbers on which trouble showed, oldest first, by kind."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Shared:
    """Trouble that several drives had on the same days.

    Attributes:
        kind: of the drive that is judged.
        days: days that it shared.
        drives: other drives that it shared them with.
    """

    kind: Trouble
    days: int
    drives: int


def noted(before: Days, kinds: Iterable[Trouble], day: int) -> Days:
    """A drive's days of trouble with those of today; what is no longer recent is dropped.

    Args:
        before: its days of trouble so far.
        kinds: what showed today.
        day: today's UTC day number.
    """
    after = {
        kind: kept for kind, days in before.items() if (kept := tuple(one for one in days if _recent(one, day)))
    }
    for kind in kinds:
        days = after.get(kind.value, ())
        if day not in days:
            after[kind.value] = (*days, day)
    return after


def shared(own: Days, others: Iterable[Days], day: int) -> tuple[Shared, ...]:
    """Which of a drive's recent troubles other drives had on the same days, often enough to count.

    Args:
        own: its days of trouble.
        others: those of the other drives of the machine.
        day: today's UTC day number.
    """
    every = tuple(others)
    found = []
    for kind in Trouble:
        mine = {one for one in own.get(kind.value, ()) if _recent(one, day)}
        if len(mine) < SHARED_DAYS:
            continue
        theirs = [
            mine & {one for beside in _BESIDE[kind] for one in days.get(beside.value, ())} for days in every
        ]
        together = set().union(*theirs)
        if len(together) >= SHARED_DAYS and len(together) >= SHARED_PART * len(mine):
            beside = sum(len(one) >= SHARED_DAYS for one in theirs)
            found.append(Shared(kind=kind, days=len(together), drives=max(1, beside)))
    return tuple(found)


def stays_with_bay(bay: str | None, others: Iterable[Mapping[str, int]], day: int) -> bool:
    """Whether another drive had link trouble in this bay before.

    Args:
        bay: where the drive that has link trouble now is; None where that is not known.
        others: for each other drive, the UTC day number of its latest link trouble by bay.
        day: today's UTC day number.
    """
    return bay is not None and any(0 <= day - there[bay] < REMEMBERED for there in others if bay in there)


def _recent(one: int, day: int) -> bool:
    return 0 <= day - one < WINDOW
