"""Which drives stand still, told once when it begins and once when it is over."""

from collections.abc import Iterable, Mapping

from diskwatch.machine.protocol import Counted
from diskwatch.machine.standstill import Standing, looked
from diskwatch.records import Entry
from diskwatch.units import plain


class Standstill:
    """Remembers what the looks before came to; one thread looks, any may ask for `blocks` and `troubles`."""

    def __init__(self) -> None:
        """Nothing has been looked at."""
        self._standing: Mapping[str, Standing] = {}
        self._told: dict[int, float] = {}
        self.blocks: frozenset[str] = frozenset()
        """Kernel names of the block devices whose requests do not move; replaced whole at each look."""
        self.troubles: tuple[str, ...] = ()
        """The same in one sentence each."""

    def look(
        self, totals: Mapping[str, Counted], drives: Mapping[int, tuple[str, ...]], *, at: int, steady: float
    ) -> tuple[Entry, ...]:
        """Take in one look at the counters.

        Args:
            totals: by kernel name.
            drives: kernel names of each drive's block devices, by the drive's number.
            at: UTC seconds since 1970.
            steady: seconds of a clock that only moves forward and stands still while the machine sleeps.

        Returns:
            What is to be written in the day book.
        """
        self._standing = {name: looked(self._standing.get(name), one, steady) for name, one in totals.items()}
        self.blocks = frozenset(name for name, one in self._standing.items() if one.hung)
        self.troubles = tuple(
            f"Requests to {plain(name)} have not moved for {self._standing[name].seconds:.0f} seconds; "
            "its drive is not asked until they do"
            for name in sorted(self.blocks)
        )
        entries: list[Entry] = []
        for number, names in sorted(drives.items()):
            hung = [self._standing[name] for name in names if name in self.blocks]
            if hung and number not in self._told:
                self._told[number] = steady - max(one.seconds for one in hung)
                entries.append(_begun(number, hung, at))
            elif not hung and number in self._told:
                there = any(name in self._standing for name in names)
                entries.append(_over(number, steady - self._told.pop(number), at, there=there))
        unwatched = sorted(self._told.keys() - drives.keys())
        entries += [_over(number, steady - self._told.pop(number), at, there=False) for number in unwatched]
        return tuple(entries)


def _begun(number: int, hung: Iterable[Standing], at: int) -> Entry:
    seconds = round(max(one.seconds for one in hung))
    waiting = sum(one.in_flight for one in hung)
    text = (
        f"Requests to it have not moved for {seconds} seconds: {waiting} under way, none answered. It is not "
        "asked for its readings until they move. If it goes on, look at the kernel's log, then at its cable "
        "and power."
    )
    return Entry(
        at=at, drive=number, kind="trouble", text=text, data={"seconds": seconds, "in_flight": waiting}
    )


def _over(number: int, stood: float, at: int, *, there: bool) -> Entry:
    seconds = round(stood)
    if there:
        text = f"Requests to it move again, after they had not for about {seconds} seconds."
    else:
        text = f"It went away while its requests had not moved for about {seconds} seconds."
    return Entry(at=at, drive=number, kind="trouble", text=text, data={"seconds": seconds, "there": there})
