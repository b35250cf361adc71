"""What is kept how long: the one table of it.

| what | in full | then |
| --- | --- | --- |
| counts of errors and events, wear, words | for ever, on change | |
| values that move all the time (below) | 13 weeks | one a day |
| what stands beside the values: failing attributes, self-tests, limits | 13 weeks | one a day |
| passes | 13 weeks | changes of outcome, and how many ended how, a day |
| traffic by the minute | 7 days | gone; the five minutes hold it |
| traffic by five minutes | 90 days | the day's histograms of mean times, by class of load, for ever |
| states of the analyser | one a week, for ever | |
| day book, findings, calls, evidence by day, places, the owner's facts | for ever | |

Thirteen weeks are 91 days. They end where a dated copy of the drive's analyser state stands: from that copy and
the passes after it, the present state can be worked out again to the bit. They are counted in copies and not by
the clock alone, so that a clock that is wrong by a year does not thin away what is fresh; traffic is counted in
days that have some, for the same reason.
"""

from enum import Enum

from diskwatch.records import SignalKind

DETAIL_DAYS = 90
"""Days for which every pass and five-minute roll-up is kept in full, at least."""

DETAIL_COPIES = 13
"""Weekly copies of a drive's state behind which its detail may be thinned."""

MINUTE_DAYS = 7
"""Days for which traffic is kept by the minute, at least."""


class Daily(Enum):
    """Which of a day's values stands for the day.

    LAST suits what adds up: the difference of two days is then what came in between. HIGHEST suits heat, and
    keeps the last one beside it, which holds until the next day's first.
    """

    LAST = "last"
    HIGHEST = "highest"


_BY_SIGNAL = {
    "temperature": Daily.HIGHEST,
    "data-read": Daily.LAST,
    "data-written": Daily.LAST,
    "read-commands": Daily.LAST,
    "write-commands": Daily.LAST,
    "load-cycles": Daily.LAST,
    "start-stops": Daily.LAST,
}
"""Signals that move all the time by their nature, though some are counted as events."""

_BY_KIND = {SignalKind.TIME: Daily.LAST}
_BY_UNIT = {
    "opaque": Daily.LAST,  # packed rates move at every pass; what they mean is not known
    "hours": Daily.LAST,
    "minutes": Daily.LAST,
    "seconds": Daily.LAST,
    "operations": Daily.LAST,
    "celsius": Daily.HIGHEST,
}


def daily(signal: str, kind: str | None, unit: str | None) -> Daily | None:
    """Which value of a day is kept after `DETAIL_DAYS`; None for a signal that is kept for ever as it changed.

    Args:
        signal: its name.
        kind: a `diskwatch.records.SignalKind`, or None for what no drive reports.
        unit: its unit, or None likewise.
    """
    if signal in _BY_SIGNAL:
        return _BY_SIGNAL[signal]
    by_kind = None if kind is None else _BY_KIND.get(SignalKind(kind))
    return by_kind or _BY_UNIT.get(unit or "")
