"""What stands around a drive: its bay, the other drives of the machine, and what they have in common."""

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass

from diskwatch.analyser.state import DriveState
from diskwatch.judge import neighbours, sentences
from diskwatch.judge.neighbours import Shared, Trouble
from diskwatch.records import CallWord, Cause, Finding, FindingKind, Pass, Reading
from diskwatch.units import day_number

RETRACTS = "power-off-retracts"
"""Emergency retracts are no error of the drive and have no ledger; they bear witness to what others count."""

_BY_SIGNAL: Mapping[str, Trouble] = {
    "unsafe-power-offs": Trouble.POWER,
    RETRACTS: Trouble.RETRACT,
    "crc-errors": Trouble.LINK,
    "link-resets": Trouble.LINK,
    "command-timeouts": Trouble.TIMEOUT,
    "kernel-timeouts": Trouble.TIMEOUT,
}
_BY_FACT: Mapping[str, Trouble] = {
    "fact:hot": Trouble.HEAT,
    "fact:warns-of-heat": Trouble.HEAT,
    "fact:unreadable": Trouble.GONE,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Around:
    """What stands around a drive when a pass is taken in.

    Attributes:
        bay: where it is plugged in; None where that is not known.
        others: the states of the other drives of the machine, as last known.
    """

    bay: str | None = None
    others: tuple[DriveState, ...] = ()

    def shared(self, state: DriveState, day: int) -> tuple[Shared, ...]:
        """Trouble that the drive had on the same days as others."""
        if not self.others:
            return ()
        return neighbours.shared(state.troubles, (one.troubles for one in self.others), day)

    def signs(self, state: DriveState, day: int) -> Mapping[str, bool | None]:
        """The signs of the table of causes that need the other drives; None where these cannot tell."""
        shared = self.shared(state, day)
        comparable = self.others and any(state.troubles.get(kind.value) for kind in Trouble)
        link = any(neighbours_link(state, day))
        return {
            "several drives at once": True if shared else False if comparable else None,
            "stays with the port": True
            if link and neighbours.stays_with_bay(self.bay, (one.bays for one in self.others), day)
            else None,
        }


ALONE = Around()
"""A drive of which no neighbour and no bay is known: a recorded one."""


def neighbours_link(state: DriveState, day: int) -> Iterator[int]:
    """The drive's recent days of link trouble."""
    return (one for one in state.troubles.get(Trouble.LINK.value, ()) if 0 <= day - one < neighbours.WINDOW)


def witness(state: DriveState, reading: Reading) -> tuple[int | None, bool]:
    """The drive's emergency retracts as last read, and whether they rose with this reading."""
    now = reading.number(RETRACTS)
    before = state.retracts
    return (before if now is None else now), now is not None and before is not None and now > before


def troubles(state: DriveState, risen: Collection[str], standing: Collection[str], day: int) -> neighbours.Days:
    """The drive's days of trouble, today's with them.

    Args:
        state: the drive before the pass.
        risen: counters that rose with it.
        standing: names of the findings that show now.
        day: UTC day number of the pass.
    """
    kinds = [_BY_SIGNAL[signal] for signal in risen if signal in _BY_SIGNAL]
    kinds += [_BY_FACT[name] for name in standing if name in _BY_FACT]
    return neighbours.noted(state.troubles, kinds, day) if kinds or state.troubles else state.troubles


def bays(state: DriveState, after: neighbours.Days, around: Around, day: int) -> Mapping[str, int]:
    """The latest day of link trouble by bay, today's with it."""
    if around.bay is None or day not in after.get(Trouble.LINK.value, ()):
        return state.bays
    return {**state.bays, around.bay: day}


def power_shared(state: DriveState, pass_: Pass, around: Around) -> Iterator[Finding]:
    """Power went away on other drives whenever this one's heads retracted in an emergency."""
    if len(state.troubles.get(Trouble.RETRACT.value, ())) < neighbours.SHARED_DAYS:
        return
    found = next(
        (one for one in around.shared(state, day_number(pass_.at)) if one.kind is Trouble.RETRACT), None
    )
    if found is not None and any("drift:power" in one.standing for one in around.others):
        yield Finding(
            name="fact:power-shared",
            kind=FindingKind.FACT,
            signals=(RETRACTS,),
            since=pass_.at,
            calls=CallWord.LOOK,
            cause=Cause.POWER,
            evidence=None,
            sentence=sentences.power_shared(found.days, found.drives),
            data={"days": found.days, "drives": found.drives},
        )
