"""What rules of warning would have done on the open daily drive data: found, alarmed, how long before.

The split is by drive: the first eight hexadecimal digits of the serial's SHA-256, modulo 10; below 6 for
choosing (60 %), the rest is kept back (40 %).
"""

import hashlib
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from statistics import median

from diskwatch.trends import spots
from diskwatch.trends.special import beta_quantile, gamma_quantile
from tests.judge.hazard import Life

YEAR = 365.25
Days = Iterator[tuple[int, bool]]
Watch = Callable[[Life], Days]


def kept_back(serial: str) -> bool:
    """Whether a drive belongs to the part that nothing was chosen on."""
    return int(hashlib.sha256(serial.encode()).hexdigest()[:8], 16) % 10 >= 6


def rises(life: Life) -> Iterator[tuple[int, int, int, int | None]]:
    """(day, rise of 5, rise of 197, 197 now) of each row, by the last usable value before."""
    last: list[int | None] = [None, None]
    for day, *values in life.rows:
        rise = [0, 0]
        for which, value in enumerate(values):
            old = last[which]
            if value is not None:
                rise[which] = max(0, value - old) if old is not None else 0
                last[which] = value
        yield day, rise[0], rise[1], last[1]


def total_of(limit: int, *, pending_only: bool = False) -> Watch:
    """A plain rule: all rises since first seen add up to a limit."""

    def watch(life: Life) -> Days:
        total = 0
        for day, replaced, pending, _ in rises(life):
            total += pending if pending_only else replaced + pending
            yield day, total >= limit

    return watch


def level_of(limit: int) -> Watch:
    """A plain rule: 197 stands at a limit or above."""

    def watch(life: Life) -> Days:
        for day, _, _, pending in rises(life):
            yield day, (pending or 0) >= limit

    return watch


def episodes_of(limit: int) -> Watch:
    """A plain rule: so many episodes, each of which lasts seven rows from the one that opened it."""

    def watch(life: Life) -> Days:
        opened, count = -99, 0
        for row, (day, replaced, pending, _) in enumerate(rises(life)):
            if replaced + pending and row - opened > 7:
                opened, count = row, count + 1
            yield day, count >= limit

    return watch


def measure_of(limit: float) -> Watch:
    """The program's damage measure at a limit or above."""

    def watch(life: Life) -> Days:
        damage = spots.Spots()
        for day, replaced, pending in life.rows:
            damage = spots.seen(damage, day=day, replaced=replaced, pending=pending)
            yield day, spots.fourfold(damage, day) >= 4 * limit

    return watch


RULES: Mapping[str, Watch] = {
    "any rise of 5 or 197": total_of(1),
    "rises add up to 4": total_of(4),
    "rises add up to 16": total_of(16),
    "rises of 197 add up to 8": total_of(8, pending_only=True),
    "197 at 8 or more": level_of(8),
    "second episode": episodes_of(2),
    "damage measure 6": measure_of(6),
    "damage measure 7 (copy)": measure_of(7),
    "damage measure 9": measure_of(9),
    "damage measure 11 (retire)": measure_of(11),
}


def warned(life: Life, watch: Watch) -> int | None:
    """The day of the first warning, or None."""
    return next((day for day, alarm in watch(life) if alarm), None)


@dataclass(frozen=True, slots=True)
class Figures:
    """What a rule did on some drives.

    Attributes:
        failed: how many failed.
        found: of these, how many were warned of.
        alarms: sound drives that were warned of.
        years: years that sound drives were watched.
        lead: median days from the warning to the last day of those found; None without any.
    """

    failed: int
    found: int
    alarms: int
    years: float
    lead: float | None

    @property
    def share(self) -> float:
        """Share of the failing that was warned of."""
        return self.found / self.failed

    @property
    def rate(self) -> float:
        """Alarms a sound drive-year."""
        return self.alarms / self.years

    def row(self) -> str:
        """With 95 % intervals by Clopper and Pearson, and by Garwood."""
        low = beta_quantile(0.025, self.found, self.failed - self.found + 1) if self.found else 0.0
        high = (
            beta_quantile(0.975, self.found + 1, self.failed - self.found) if self.found < self.failed else 1.0
        )
        least = gamma_quantile(0.025, self.alarms) / self.years if self.alarms else 0.0
        most = gamma_quantile(0.975, self.alarms + 1) / self.years
        lead = "-" if self.lead is None else f"{self.lead:g}"
        return (
            f"{self.found:3}/{self.failed:<3} {self.share:5.0%} ({low:.0%}-{high:.0%})"
            f"  {self.rate:6.3f} ({least:.3f}-{most:.3f})  {lead:>5} d"
        )


def figures(lives: Mapping[str, Life], warnings: Mapping[str, int], serials: Iterable[str]) -> Figures:
    """What warnings came to on some drives.

    Args:
        lives: all drives.
        warnings: the day of the first warning of each drive that got one.
        serials: the drives in question.
    """
    chosen = list(serials)
    failed = [serial for serial in chosen if lives[serial].failed]
    sound = [serial for serial in chosen if not lives[serial].failed]
    leads = [lives[serial].rows[-1][0] - warnings[serial] for serial in failed if serial in warnings]
    return Figures(
        failed=len(failed),
        found=len(leads),
        alarms=sum(serial in warnings for serial in sound),
        years=sum(len(lives[serial].rows) for serial in sound) / YEAR,
        lead=median(leads) if leads else None,
    )
