"""What is to be expected: the odds of drives that showed the same, and the margin of the call."""

from diskwatch.judge import stakes
from diskwatch.judge.margin_told import margin_told
from diskwatch.judge.odds_told import odds_told
from diskwatch.records import DriveLine
from diskwatch.ticket.part import Part, at
from diskwatch.units import DAY


def odds_part(line: DriveLine, now: int) -> Part:
    """The odds, with interval, horizon and source.

    Args:
        line: the drive.
        now: UTC seconds since 1970.
    """
    found = stakes.odds_of(line, now)
    if found is None:
        return Part(value=None, reason=stakes.no_odds_of(line, now))
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


def margin_part(line: DriveLine, now: int) -> Part:
    """Time left until the first limit, as an interval with its probability.

    Args:
        line: the drive.
        now: UTC seconds since 1970.
    """
    left = stakes.margin_of(line, now)
    if not left.known:
        return Part(value=None, reason=margin_told(left, now))
    by = stakes.replace_by_of(line, now)
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
