"""From rises of a counter to steps of its ledger: days, episodes and what they absorb.

Errors come in bursts, so a burst counts once: the first powered day with a rise opens an episode and the next
`ABSORBED` powered days are absorbed, whatever happens on them: no step, no exposure. The size of a rise does
not enter (bursts are heavy-tailed); sizes are what `diskwatch.trends.spots` weighs. Latent sector errors
cluster in time and space: Bairavasundaram and others (2007), abstract; Schroeder and others (2010).

What this leaves open, measured on invented lives with every counter exactly at its norm (alarms of all counters
together in ten years; `tests/trends/test_bench_bound.py`): 0.53 where episodes are single days, 0.59 where each
goes on for another day three times in ten; but 1.1 where it goes on six times in ten, 1.3 where one in fifty
goes on for weeks, and 1.8 where a tenth of life has three times the errors. There the assumption fails, the
bound with it, and the alarm says what is true: the counter rose on so many occasions, beyond the norm. Days
off, days unwatched and counters that begin anew do not raise the figure.
"""

from dataclasses import dataclass, replace

from diskwatch.trends import ledger as ledgers
from diskwatch.trends.ledger import Ledger

ABSORBED = 7.0
"""Powered days after the opening day of an episode that take no part."""

REMEMBERED = 12
"""Latest episodes whose days are kept, for the forecast of those to come; an alarm takes fewer."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Stream:
    """One stream of counters through time; plain values, complete for a restart.

    Attributes:
        ledger: evidence of the steps taken so far.
        day: the powered day that is open now, as a UTC day number.
        exposure: powered days that the open step covers: 1, and those since the last reading before it.
        absorbing: powered days still to be absorbed when the open step began.
        decided: True once the open step has been taken (an episode is taken at once) or is to be left out.
        episodes: how many opened so far.
        first_episode: day of the first one, or None.
        last_episode: day of the latest one, or None.
        powered: powered days seen so far, closed ones.
        opened: the latest episodes, oldest first: UTC day number, and powered days seen by the end of that day.
    """

    ledger: Ledger
    day: int
    exposure: float = 1.0
    absorbing: float = 0.0
    decided: bool = False
    episodes: int = 0
    first_episode: int | None = None
    last_episode: int | None = None
    powered: float = 0.0
    opened: tuple[tuple[int, float], ...] = ()


def begin(day: int) -> Stream:
    """A stream on the day on which its counters are first read."""
    return Stream(ledger=ledgers.empty(), day=day)


def next_day(stream: Stream, *, day: int, exposure: float, norm_per_day: float) -> Stream:
    """Close the open day and open a later one.

    Args:
        stream: state before.
        day: UTC day number, later than the open one.
        exposure: powered days that the new step covers, at least 1.
        norm_per_day: tolerated episodes a powered day.

    Raises:
        ValueError: the day is not later, or the exposure is below 1.
    """
    if day <= stream.day or exposure < 1:
        raise ValueError(f"day {day} with exposure {exposure} cannot follow day {stream.day}")
    absorbed = min(stream.absorbing, stream.exposure)
    counted = stream.exposure - absorbed
    closed = stream.ledger
    if not stream.decided and counted > 0:
        factors = ledgers.count_factors(episode=False, exposure=counted, norm_per_day=norm_per_day)
        closed = ledgers.after(closed, factors, counted)
    opened_one = stream.decided and stream.last_episode == stream.day
    return Stream(
        ledger=closed,
        day=day,
        exposure=exposure,
        absorbing=ABSORBED if opened_one else stream.absorbing - absorbed,
        episodes=stream.episodes,
        first_episode=stream.first_episode,
        last_episode=stream.last_episode,
        powered=stream.powered + stream.exposure,
        opened=stream.opened,
    )


def rise(stream: Stream, *, norm_per_day: float) -> Stream:
    """A counter of the stream rose within the open step.

    A step that is partly absorbed is left out when something rises within it: nobody can tell whether the rise
    fell into the absorbed part. Leaving it out keeps the mean factor at or below 1, so the bound holds.

    Args:
        stream: state before.
        norm_per_day: tolerated episodes a powered day.
    """
    if stream.decided:
        return stream
    if stream.absorbing > 0:
        return replace(stream, decided=stream.exposure > stream.absorbing)
    factors = ledgers.count_factors(episode=True, exposure=stream.exposure, norm_per_day=norm_per_day)
    return replace(
        stream,
        ledger=ledgers.after(stream.ledger, factors, stream.exposure),
        decided=True,
        episodes=stream.episodes + 1,
        first_episode=stream.day if stream.first_episode is None else stream.first_episode,
        last_episode=stream.day,
        opened=(*stream.opened[1 - REMEMBERED :], (stream.day, stream.powered + stream.exposure)),
    )


def powered_between(*, days: int, hours: int | None) -> float:
    """Powered days that lie strictly between two days with readings.

    Where the drive counts its hours these decide, and never say more than the calendar; else every day counts,
    which is the careful choice: more exposure only asks for more evidence.

    Args:
        days: calendar days strictly between, at least 0.
        hours: powered hours that the drive counted from the last reading before to the first after, or None
            where it does not tell, or its counter fell.

    Returns:
        Powered days, 0 to ``days``.
    """
    if hours is None or hours < 0:
        return float(days)
    return min(float(days), hours / 24)
