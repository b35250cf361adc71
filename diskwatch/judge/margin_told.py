"""The margin and the day of replacement in sentences."""

from datetime import UTC, datetime

from diskwatch.judge.language import _
from diskwatch.judge.names import begun, signal_name
from diskwatch.records import Margin
from diskwatch.trends.interval import Interval, bounded, words
from diskwatch.units import DAY


def margin_told(left: Margin, at: int) -> str:
    """The margin in one sentence.

    Args:
        left: the margin.
        at: now, UTC seconds since 1970.
    """
    if left.low is None or left.signal is None or left.probability is None:
        return _("Margin not known: {reason}.").format(reason=left.reason)
    if left.low == 0 and left.high == 0:
        return _("{signal}: its limit of {limit} is reached.").format(
            signal=begun(signal_name(left.signal)), limit=f"{left.limit:g}"
        )
    interval = bounded(Interval(low=left.low, high=left.high, probability=left.probability))
    return _(
        "{signal}: as things go now its limit of {limit} is reached {when} ({probability} % of such intervals "
        "hold)."
    ).format(
        signal=begun(signal_name(left.signal)),
        limit=f"{left.limit:g}",
        when=words(interval, at),
        probability=round(left.probability * 100),
    )


def replace_by_told(by: int, day: int) -> str:
    """By when a drive called copy is to be replaced.

    Args:
        by: that UTC day number.
        day: today's.
    """
    date = datetime.fromtimestamp(by * DAY, UTC).date().isoformat()
    text = (
        _("Copy it off now and replace it by {date}: a deadline for the deed, no forecast of the drive's end.")
        if by >= day
        else _("It was to be replaced by {date}: copy it off now, and replace it without further delay.")
    )
    return text.format(date=date)
