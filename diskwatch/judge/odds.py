"""What became of other drives that showed the same: shares with interval, horizon and source.

``odds.csv`` was worked out from the open daily drive data that Backblaze publishes, 10 April to 19 May 2013:
11,446 data-centre hard drives, 60 of which failed. A drive enters a condition once, on the first day on which
it shows it; the share is 1 - Kaplan and Meier's estimate at the horizon; the interval is Clopper and Pearson's
for the effective number of drives that Greenwood's variance gives. A test works every row out anew.

The figures hold for such drives alone: 40 days of one fleet that ran all day, no solid-state drive, nothing
behind a bridge, no home. 40 days carry no horizon beyond 30. The interval covers chance in that fleet, not the
spread between models (0 to 28 of 100 within 30 days of a rise), nor the years since. Failed means that the
operator took the drive out, partly because of these very counters (from memory of what the owner of the data
has written), which makes them look better than they are. One row is used, the most specific that holds: rows
overlap, so that they must never be multiplied.
"""

import csv
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

from diskwatch.records import Kind, Odds

LEVEL = 0.8
"""How often an interval as shown holds the share in that fleet."""

BEYOND = 30
"""Days beyond which the data carry nothing."""

SOURCE = (
    "open daily drive data of Backblaze, 2013-04-10 to 2013-05-19, {drives} data-centre hard drives that "
    "showed it, {failed} of which failed within {days} days; Kaplan-Meier with Clopper-Pearson interval (80 %)"
)

_NEWLY = "first-rise-after-14-days"
ORDER = (
    *("score-11", "score-9", "score-7", "both-rose"),
    *(_NEWLY, "first-rise-from-zero", "pending-rose", "reallocated-rose"),
)
"""Conditions in the order in which they are used, the most specific first.

A first rise after two weeks without one stands before the other first rises: many drives of the data drifted
already when it begins, and those that begin later fare better.
"""

_WATCHED = 14
"""Days without a rise after which a first one counts as new."""

_FOURFOLD = {"score-7": 28, "score-9": 36, "score-11": 44}


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """A row of the table.

    Attributes:
        drives: how many drives showed the condition.
        failed: how many of them failed within the horizon.
        share: the share that failed, 0 to 1.
        low: lower end of the 80 % interval.
        high: its upper end.
        bound: upper end of the 95 % interval, all that may be said where few failed.
        only_bound: whether it is.
    """

    drives: int
    failed: int
    share: float
    low: float
    high: float
    bound: float
    only_bound: bool


@cache
def table() -> Mapping[tuple[str, int], Row]:
    """Rows by condition and horizon in days."""
    text = files("diskwatch.judge").joinpath("odds.csv").read_text(encoding="utf-8")
    return {
        (row["condition"], int(row["horizon_days"])): Row(
            drives=int(row["drives"]),
            failed=int(row["failed"]),
            share=float(row["probability"]),
            low=float(row["low80"]),
            high=float(row["high80"]),
            bound=float(row["high95"]),
            only_bound=row["say"] == "upper-bound",
        )
        for row in csv.DictReader(text.splitlines())
    }


def known_for(kind: Kind) -> bool:
    """Whether there are figures for drives of a kind at all."""
    return kind is Kind.HDD


def shown(
    before: Mapping[str, int],
    *,
    day: int,
    fourfold: int,
    risen: tuple[bool, bool],
    from_zero: bool,
    watched: int,
) -> Mapping[str, int]:
    """The conditions that a drive has shown so far, with the day on which each first showed.

    Args:
        before: the same before this reading.
        day: UTC day number of the reading.
        fourfold: four times the damage measure.
        risen: whether replaced and whether pending sectors rose with this reading.
        from_zero: whether both were zero when first read.
        watched: days from the first reading to this one.
    """
    now = dict(before)
    for name, limit in _FOURFOLD.items():
        if fourfold >= limit:
            now.setdefault(name, day)
    if any(risen) and not before.keys() & {"pending-rose", "reallocated-rose"}:
        if from_zero:
            now["first-rise-from-zero"] = day
        if watched >= _WATCHED:
            now[_NEWLY] = day
    for name, rose in zip(("reallocated-rose", "pending-rose"), risen, strict=True):
        if rose:
            now.setdefault(name, day)
    if {"pending-rose", "reallocated-rose"} <= now.keys():
        now.setdefault("both-rose", day)
    return now


def odds(showed: Mapping[str, int], *, day: int) -> Odds | None:
    """What became of other drives that showed the same, as long as the figures reach.

    Args:
        showed: conditions with the UTC day number on which each first showed.
        day: today's.

    Returns:
        The most specific row that holds; None where none does, or where all began longer ago than the horizon.
    """
    for condition in ORDER:
        since = showed.get(condition)
        days = next((days for days in (BEYOND, 14) if (condition, days) in table()), None)
        if since is None or days is None or not 0 <= day - since < days:
            continue
        row = table()[condition, days]
        return Odds(
            condition=condition,
            days=days,
            share=None if row.only_bound else row.share,
            low=None if row.only_bound else row.low,
            high=row.bound if row.only_bound else row.high,
            level=0.975 if row.only_bound else LEVEL,
            drives=row.drives,
            failed=row.failed,
            source=SOURCE.format(drives=row.drives, failed=row.failed, days=days),
            since_day=since,
        )
    return None
