"""What is to be expected of a drive: each forecast with its limit, and who set that.

Limits are the drive's own where it states them; a maker's usual one stands in only where it does not, and the
forecast says so. Working these out takes milliseconds, so it is asked now and then and not at every pass.
"""

from collections.abc import Iterator

from diskwatch.analyser.state import DriveState
from diskwatch.records import Forecast, LimitSource
from diskwatch.trends import wear as wears
from diskwatch.trends.interval import Interval
from diskwatch.trends.wear import Wear
from diskwatch.units import day_number

RATED = 100
"""Per cent of endurance at which the maker's rating ends (NVM Express, SMART / Health log 02h, byte 5)."""

USUAL_SPARE = 10
"""Per cent of spare blocks that makers usually call too few (common practice, no source)."""


def forecasts(state: DriveState, at: int) -> tuple[Forecast, ...]:
    """Every forecast that the drive's kind allows, also those that say nothing yet, and why.

    Args:
        state: the drive.
        at: now, UTC seconds since 1970.
    """
    return (*_wear(state, day_number(at)), *_latency(state, day_number(at)))


def _wear(state: DriveState, day: int) -> Iterator[Forecast]:
    wearing = state.wearing
    if wearing.endurance is not None:
        yield _forecast(
            "percentage-used", RATED, LimitSource.STANDARD, day, _worn(wearing.endurance, day, RATED)
        )
    if wearing.spare is not None:
        stated = wearing.spare_threshold
        threshold = USUAL_SPARE if stated is None else stated
        yield _forecast(
            "available-spare",
            threshold,
            LimitSource.USUAL if stated is None else LimitSource.DRIVE,
            day,
            _worn(wearing.spare, day, 100 - threshold),
        )


def _worn(wear: Wear, day: int, limit: int) -> Interval:
    # After a clock was set back the marks lie ahead; now is where they end.
    return wears.forecast(wear, day=max(day, wear.marks[-1][0]), limit=limit)


def _latency(state: DriveState, day: int) -> Iterator[Forecast]:
    """When work will take twice as long as usual: asked after an alarm only."""
    for signal, now in state.latency.items():
        if now.twice is not None and now.usual_us is not None and f"drift:{signal}" in state.standing:
            yield _forecast(signal, 2 * now.usual_us, LimitSource.OWN, day, now.twice)


def _forecast(signal: str, limit: float, limit_from: LimitSource, day: int, interval: Interval) -> Forecast:
    return Forecast(
        signal=signal,
        limit=limit,
        made_on_day=day,
        low=interval.low,
        high=interval.high,
        probability=interval.probability,
        reason=interval.reason,
        limit_from=limit_from,
    )
