"""Roll-ups for tests, invented."""

from math import exp
from random import Random

from diskwatch.records import IoCounts, IoRollup
from diskwatch.units import DAY

SIZES = (4096, 16384, 65536)


def rollup(
    at=300,
    reads=300,
    writes=0,
    *,
    read_size=4096,
    write_size=4096,
    read_ms=6.0,
    write_ms=2.0,
    wall=300,
    covered=1.0,
    longest_us=None,
    reset=False,
):
    """Five minutes that end at a time; ``read_ms`` and ``write_ms`` are means of one operation."""
    return IoRollup(
        drive=1,
        at=at,
        wall_seconds=wall,
        covered_ms=round(wall * 1000 * covered),
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=reads * read_size,
            write_bytes=writes * write_size,
            read_ms=round(reads * read_ms),
            write_ms=round(writes * write_ms),
            busy_ms=0,
        ),
        longest_read_us=longest_us,
        longest_write_us=None,
        spans=30,
        reset=reset,
    )


def a_day(day, times, *, reads=3000, writes=300):
    """Work of some classes from eight in the morning on.

    Args:
        day: UTC day number.
        times: mean times of a read in milliseconds, one a roll-up, by size in bytes; writes take a third.
        reads: in each roll-up.
        writes: in each roll-up.
    """
    start = day * DAY + 8 * 3600
    work = [(size, one) for size, series in times.items() for one in series]
    return [
        rollup(
            start + 300 * (place + 1),
            reads,
            writes,
            read_size=size,
            write_size=size,
            read_ms=one,
            write_ms=one / 3,
        )
        for place, (size, one) in enumerate(work)
    ]


def invented_days(seed, count, *, slower_from=None, first_day=100):
    """Days of an invented drive: three sizes of work, each with noise of its own, some days off."""
    noise = Random(seed)  # noqa: S311  # invented noise
    days = []
    for day in range(first_day, first_day + count):
        factor = 2.0 if slower_from is not None and day >= first_day + slower_from else 1.0
        factor *= exp(noise.gauss(0, 0.04))
        times = {
            size: [
                (3 + place * 2) * factor * exp(noise.gauss(0, 0.1)) for _ in range(noise.choice((0, 2, 5, 14)))
            ]
            for place, size in enumerate(SIZES)
        }
        days.append(a_day(day, times))
    return days
