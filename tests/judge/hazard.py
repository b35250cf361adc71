"""The recipe by which ``diskwatch/judge/odds.csv`` is worked out from the open daily drive data of 2013.

python -m tests.judge.hazard FILE      prints the table anew

Kaplan and Meier's estimate of the share that failed within the horizon, counted from the first day on which a
drive showed the condition; Greenwood's variance turned into an effective number of drives; Clopper and
Pearson's interval for that number. It shares no code with the program but the beta quantile: the rises and the
score are counted here a second time.
"""

import csv
import gzip
import os
import sys
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date
from pathlib import Path

from diskwatch.trends.special import beta_quantile

ROOT = Path(__file__).resolve().parents[2]
FILE = Path("drive_series") / "daily_2013-04-10_2013-05-19.csv.gz"
NO_COUNT = 65_000
"""Values of 5 or 197 from here on are no counts (65535, 65528 and others stand there)."""

FIELDS = (
    *("condition", "horizon_days", "drives", "failed", "probability"),
    *("low80", "high80", "low95", "high95", "effective", "say"),
)


@dataclass(slots=True)
class Life:
    """One drive's rows: (day, value of 5, value of 197), and whether it failed on the last."""

    rows: list[tuple[int, int | None, int | None]] = field(default_factory=list)
    failed: bool = False


def shared_data() -> Path | None:
    """The folder of recorded data that is not part of the repository, or None."""
    folder = Path(os.environ.get("DISKWATCH_SHARED", ROOT.parent / "shared")) / "data"
    return folder if folder.is_dir() else None


def lives(path: Path) -> Mapping[str, Life]:
    """All drives of the file, by serial, rows in order."""
    found: dict[str, Life] = defaultdict(Life)
    with gzip.open(path, "rt", newline="") as lines:
        for row in csv.DictReader(lines):
            life = found[row["serial_number"]]
            day = date.fromisoformat(row["date"]).toordinal()
            life.rows.append((day, _value(row["smart_5_raw"]), _value(row["smart_197_raw"])))
            life.failed = life.failed or row["failure"] == "1"
    for life in found.values():
        life.rows.sort(key=lambda one: one[0])
    return found


def _value(text: str) -> int | None:
    value = int(text) if text else None
    return None if value is None or value >= NO_COUNT else value


class _Watched:
    """One drive's rows going by, and what they have shown so far."""

    def __init__(self, first_day: int) -> None:
        self.first_day = first_day
        self.shown: dict[str, int] = {"any": first_day}
        self.firsts: list[int | None] = [None, None]
        self.last: list[int | None] = [None, None]
        self.risen = [False, False]
        self.coarse = True
        self.fresh: list[tuple[int, int]] = []

    def see(self, day: int, values: Sequence[int | None]) -> None:
        """A row."""
        rises = self._rises(values)
        if day == self.first_day and self.firsts == [0, 0]:
            self.shown["both-zero"] = day
        if any(rises):
            if not self.fresh:
                self._first_rise(day)
            self.fresh.append((day, sum(rises) // self._size))
            self.shown.setdefault("either-rose", day)
        elif len(self.fresh) == 1 and day - self.fresh[0][0] == 7:
            self.shown["one-rise-then-7-quiet-days"] = day
        for rise, name in zip(rises, ("reallocated-rose", "pending-rose"), strict=True):
            if rise:
                self.shown.setdefault(name, day)
        if all(self.risen):
            self.shown.setdefault("both-rose", day)
        for limit in (7, 9, 11):
            if self._score(day) >= limit:
                self.shown.setdefault(f"score-{limit}", day)

    def _first_rise(self, day: int) -> None:
        if self.firsts == [0, 0]:
            self.shown["first-rise-from-zero"] = day
        if day - self.first_day >= 14:
            self.shown["first-rise-after-14-days"] = day

    def _rises(self, values: Sequence[int | None]) -> list[int]:
        rises = [0, 0]
        for which, value in enumerate(values):
            if value is None:
                continue
            self.coarse = self.coarse and value % 8 == 0
            old = self.last[which]
            if old is None:
                self.firsts[which] = value
            elif value > old:
                rises[which] = value - old
                self.risen[which] = True
            self.last[which] = value
        return rises

    @property
    def _size(self) -> int:
        return 8 if self.coarse else 1

    def _score(self, day: int) -> float:
        recent = sum(count for when, count in self.fresh if when > day - 14)
        replaced, pending = ((value or 0) // self._size for value in self.last)
        if not recent:
            return 0
        return recent.bit_length() + pending.bit_length() + replaced.bit_length() / 4


def entered(life: Life) -> Mapping[str, int]:
    """The first day on which the drive showed each condition."""
    watched = _Watched(life.rows[0][0])
    for day, *values in life.rows:
        watched.see(day, values)
    return watched.shown


@dataclass(frozen=True, slots=True)
class Share:
    """A row of the table."""

    condition: str
    horizon: int
    drives: int
    failed: int
    probability: float
    intervals: tuple[float, float, float, float]
    effective: float
    in_view: int

    @property
    def say(self) -> str:
        """What may be said of it: nothing below 30 drives, only an upper bound below 5 failures."""
        if self.drives < 30:
            return "nothing"
        return "share" if self.failed >= 5 else "upper-bound"

    @property
    def supported(self) -> bool:
        """Whether enough drives were still in view at the horizon."""
        return self.in_view >= max(3, self.drives / 10)


def share(condition: str, times: Sequence[tuple[int, bool]], horizon: int) -> Share:
    """Kaplan and Meier, Greenwood, Clopper and Pearson over (days to the end of view, whether it failed)."""
    survival, greenwood = 1.0, 0.0
    for time in sorted({time for time, failed in times if failed and time <= horizon}):
        at_risk = sum(one >= time for one, _ in times)
        deaths = sum(one == time and failed for one, failed in times)
        survival *= 1 - deaths / at_risk
        greenwood += deaths / (at_risk * (at_risk - deaths))
    gone = sum(failed and time <= horizon for time, failed in times)
    in_view = sum(time >= horizon for time, _ in times)
    effective = min(len(times), (1 - survival) / (survival * greenwood)) if gone else in_view
    events = (1 - survival) * effective
    ends = [end for level in (0.8, 0.95) for end in _clopper_pearson(events, effective, level)]
    return Share(
        condition=condition,
        horizon=horizon,
        drives=len(times),
        failed=gone,
        probability=1 - survival,
        intervals=(ends[0], ends[1], ends[2], ends[3]),
        effective=effective,
        in_view=in_view,
    )


def _clopper_pearson(events: float, number: float, level: float) -> tuple[float, float]:
    tail = (1 - level) / 2
    low = beta_quantile(tail, events, number - events + 1) if events > 0 else 0.0
    return low, beta_quantile(1 - tail, events + 1, number - events)


def table(every: Iterable[Life], horizons: Sequence[int] = (14, 30)) -> tuple[Share, ...]:
    """All rows that the data support."""
    times: dict[str, list[tuple[int, bool]]] = defaultdict(list)
    for life in every:
        last = life.rows[-1][0]
        for condition, day in entered(life).items():
            times[condition].append((last - day, life.failed))
    rows = (share(condition, times[condition], days) for condition in sorted(times) for days in horizons)
    return tuple(row for row in rows if row.supported and row.say != "nothing")


def _printed(rows: Iterable[Share]) -> None:
    out = csv.writer(sys.stdout, lineterminator="\n")
    out.writerow(FIELDS)
    for row in rows:
        numbers = [f"{one:.6f}" for one in (row.probability, *row.intervals)]
        out.writerow(
            [
                *(row.condition, row.horizon, row.drives, row.failed),
                *numbers,
                f"{row.effective:.2f}",
                row.say,
            ]
        )


if __name__ == "__main__":
    _printed(table(lives(Path(sys.argv[1])).values()))
