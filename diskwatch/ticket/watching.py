"""How the drive was watched, and when it was not: what is not known of it."""

from collections import Counter
from collections.abc import Iterator, Sequence

from diskwatch.records import DriveLine, Outcome, PassDay
from diskwatch.ticket.part import Json, Part, at, short
from diskwatch.units import DAY

GAP = 2 * DAY
"""Seconds without a reading from which on it is told."""

_MOST_GAPS = 200


def watching_part(line: DriveLine, days: Sequence[PassDay], now: int) -> Part:
    """Passes, and the gaps between readings.

    Args:
        line: the drive.
        days: how its passes ended, by day.
        now: UTC seconds since 1970.
    """
    last = line.last_pass
    passes: Counter[str] = Counter()
    for one in days:
        passes[one.outcome.value] += one.passes
    read = sorted((one.first, one.last) for one in days if one.outcome is Outcome.READ)
    gaps = list(_gaps(read, days, now))
    return Part(
        value={
            "first_read": at(read[0][0]) if read else None,
            "last_read": at(max(end for _, end in read)) if read else None,
            "last_pass": None
            if last is None
            else {
                "at": at(last.at),
                "outcome": last.outcome.value,
                "explanation": short(last.explanation),
            },
            "passes": sum(passes.values()),
            "passes_by_outcome": [
                {"outcome": outcome.value, "passes": passes[outcome.value]} for outcome in Outcome
            ],
            "days_read": len({one.day for one in days if one.outcome is Outcome.READ}),
            "gaps": gaps[-_MOST_GAPS:],
            "gaps_left_out": max(0, len(gaps) - _MOST_GAPS),
        }
    )


def _gaps(read: Sequence[tuple[int, int]], days: Sequence[PassDay], now: int) -> Iterator[Json]:
    ends = [*((first, last) for first, last in read), (now, now)]
    reached = ends[0][1]
    for first, last in ends[1:]:
        if first - reached >= GAP:
            vain = sum(
                one.passes
                for one in days
                if one.outcome is not Outcome.READ and reached < one.last and one.first < first
            )
            yield {"from": at(reached), "until": at(first), "passes_without_reading": vain}
        reached = max(reached, last)
