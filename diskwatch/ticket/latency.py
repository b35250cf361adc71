"""How long the drive takes for its work, then and now, compared at equal load only."""

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from math import exp, log

from diskwatch.records import ClassDay, Direction, IoRollup
from diskwatch.ticket.part import Json, Part, at
from diskwatch.trends.histogram import added, quantile
from diskwatch.trends.load import class_days
from diskwatch.units import DAY, day_number

WINDOW = 28
"""Days at the beginning of the watch, and days up to now, that are held against each other."""

LEAST = 12
"""Stretches of five minutes that a class of load needs on both sides to be compared."""

_Days = Sequence[tuple[int, ClassDay]]


def condensed(rollups: Iterable[IoRollup]) -> tuple[tuple[int, ClassDay], ...]:
    """Classes of load by day, where nobody has condensed the traffic yet."""
    by_day: defaultdict[int, list[IoRollup]] = defaultdict(list)
    for one in rollups:
        # A roll-up bears the time of its end.
        by_day[day_number(one.at - 1)].append(one)
    return tuple((day, one) for day, found in sorted(by_day.items()) for one in class_days(found))


def latency_part(then: _Days, now: _Days) -> Part:
    """Mean times at equal load.

    Args:
        then: the classes of the first `WINDOW` days with traffic.
        now: those of the last.
    """
    told = [one for direction in Direction if (one := _direction(then, now, direction)) is not None]
    if told:
        return Part(value=told)
    return Part(
        value=None,
        reason="No class of load has been met often enough both in the first weeks and lately to compare them.",
    )


def _direction(then: _Days, now: _Days, direction: Direction) -> Json | None:
    before, after = _by_class(then, direction), _by_class(now, direction)
    shared = [
        (one, before[one], after[one])
        for one in sorted(before.keys() & after.keys())
        if min(sum(before[one].values()), sum(after[one].values())) >= LEAST
    ]
    if not shared:
        return None
    classes: list[Json] = []
    weighted = total = 0.0
    for number, old, new in shared:
        was, is_ = quantile(old, 0.5), quantile(new, 0.5)
        if was is None or is_ is None:
            continue
        weight = min(sum(old.values()), sum(new.values()))
        weighted += weight * log(is_ / was)
        total += weight
        classes.append(
            {
                "load_class": number,
                "then_ms": was,
                "now_ms": is_,
                "stretches_then": sum(old.values()),
                "stretches_now": sum(new.values()),
            }
        )
    return {
        "direction": direction.name.lower(),
        "then": _span(then),
        "now": _span(now),
        "times_as_long": exp(weighted / total),
        "classes": classes,
    }


def _by_class(days: _Days, direction: Direction) -> Mapping[int, Mapping[int, int]]:
    found: defaultdict[int, Mapping[int, int]] = defaultdict(dict)
    for _, one in days:
        if one.direction is direction:
            found[one.load_class] = added(found[one.load_class], one.histogram)
    return found


def _span(days: _Days) -> Json:
    return {"from": at(days[0][0] * DAY), "until": at((days[-1][0] + 1) * DAY)}
