"""What is to be expected: the odds of drives that showed the same, and the margin of the call."""

from collections.abc import Iterable

from diskwatch.analyser import DriveState
from diskwatch.judge import odds
from diskwatch.judge.margin import margin, replace_by
from diskwatch.judge.margin_told import margin_told
from diskwatch.judge.odds_told import odds_told
from diskwatch.records import DriveLine, Forecast
from diskwatch.ticket.part import Part, at
from diskwatch.units import DAY, day_number


def odds_part(line: DriveLine, state: DriveState | None, now: int) -> Part:
    """The odds, with interval, horizon and source.

    Args:
        line: the drive.
        state: what was learnt of it, or None where that cannot be read.
        now: UTC seconds since 1970.
    """
    if not odds.known_for(line.drive.kind):
        return Part(
            value=None, reason="There are figures for internal hard drives alone, from a data centre of 2013."
        )
    found = None if state is None else odds.odds(state.showed, day=day_number(now))
    if found is None:
        return Part(value=None, reason="It has shown nothing lately that there are figures for.")
    return Part(
        value={
            "sentence": odds_told(found),
            "condition": found.condition,
            "days": found.days,
            "share": found.share,
            "low": found.low,
            "high": found.high,
            "level": found.level,
            "drives": found.drives,
            "failed": found.failed,
            "source": found.source,
            "since": at(found.since_day * DAY),
        }
    )


def margin_part(line: DriveLine, forecasts: Iterable[Forecast], now: int) -> Part:
    """Time left until the first limit, as an interval with its probability.

    Args:
        line: the drive.
        forecasts: the latest one about each of its signals.
        now: UTC seconds since 1970.
    """
    day = day_number(now)
    left = margin(forecasts, day=day)
    if not left.known:
        return Part(value=None, reason=margin_told(left, now))
    by = replace_by(line.call, left, day=day)
    return Part(
        value={
            "sentence": margin_told(left, now),
            "low_days": left.low,
            "high_days": left.high,
            "probability": left.probability,
            "signal": left.signal,
            "limit": left.limit,
            "replace_by": None if by is None else at(by * DAY),
        }
    )
