"""What is to be expected of a drive: each forecast with its limit, and who set that.

Limits are the drive's own where it states them; a maker's usual one stands in only where it does not, and the
forecast says so. Working these out takes milliseconds, so it is asked now and then and not at every pass.
"""

from collections.abc import Iterable, Iterator, Mapping

from diskwatch.analyser.state import DriveState
from diskwatch.judge import forecast_told
from diskwatch.records import Forecast, LimitSource
from diskwatch.trends import waiting, wear as wears
from diskwatch.trends.episodes import Stream
from diskwatch.trends.interval import USUAL, Interval, unknown
from diskwatch.trends.norms import NORMS, Norm
from diskwatch.trends.wear import Wear
from diskwatch.units import day_number

RATED = 100
"""Per cent of endurance at which the maker's rating ends (NVM Express, SMART / Health log 02h, byte 5)."""

USUAL_SPARE = 10
"""Per cent of spare blocks that makers usually call too few (common practice, no source)."""

EPISODES = 5
"""Limits of a counter are multiples of so many episodes: for five more the intervals were measured to hold."""

COUNTED: Mapping[str, str] = {"media": "media-episodes", "flash-media": "flash-media-episodes"}
"""Streams whose next episodes are forecast after an alarm, and what these are called among the forecasts.

Of a link, of power and of commands no next occasion is waited for: they are mended and not replaced.
"""


def forecasts(state: DriveState, at: int, ended: Iterable[str] = ()) -> tuple[Forecast, ...]:
    """Every forecast that the drive's kind allows, also those that say nothing yet, and why.

    Args:
        state: the drive.
        at: now, UTC seconds since 1970.
        ended: signals of which a forecast still stands although its alarm is over.
    """
    day = day_number(at)
    return (*_wear(state, day), *_latency(state, day), *_episodes(state, day), *_over(ended, day))


def alarmed(state: DriveState) -> tuple[str, ...]:
    """Signals that are forecast only while their alarm stands."""
    slow = tuple(signal for signal in state.latency if f"drift:{signal}" in state.standing)
    return (*slow, *(name for stream, name in COUNTED.items() if f"drift:{stream}" in state.standing))


def _over(ended: Iterable[str], day: int) -> Iterator[Forecast]:
    for signal in ended:
        yield _forecast(signal, 0, LimitSource.OWN, day, unknown(forecast_told.alarm_over()))


def _episodes(state: DriveState, day: int) -> Iterator[Forecast]:
    """When so many episodes will have come that the next limit is reached: asked after an alarm only."""
    for norm in NORMS:
        stream = state.streams.get(norm.stream)
        if stream is None or norm.stream not in COUNTED or f"drift:{norm.stream}" not in state.standing:
            continue
        signal, came = COUNTED[norm.stream], stream.episodes
        # The limit that was reached today is told before the next one, and settles what was said of it.
        if came and came % EPISODES == 0 and stream.last_episode == day:
            yield _forecast(signal, came, LimitSource.OWN, day, Interval(low=0, high=0, probability=USUAL))
        limit = came - came % EPISODES + EPISODES
        yield _forecast(signal, limit, LimitSource.OWN, day, _waited(stream, norm, limit - came, day))


def _waited(stream: Stream, norm: Norm, more: int, day: int) -> Interval:
    """Calendar days until some more episodes, at the share of powered days since trouble began."""
    if len(stream.opened) < stream.episodes and len(stream.opened) < waiting.LEAST:
        return unknown(forecast_told.days_not_kept())
    now = stream.powered + stream.exposure
    every = [powered for _, powered in stream.opened]
    days = waiting.since_onset(every, now=now, norm_per_day=norm.per_day)
    told = waiting.after_alarm(more, episodes=days, now=now)
    if told.low is None or told.high is None:
        return told
    began_on, began = stream.opened[-len(days)]
    share = min(1.0, (now - began + 1) / max(1.0, day - began_on + 1))
    return Interval(low=told.low / share, high=told.high / share, probability=told.probability)


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
