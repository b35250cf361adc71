"""The margin of a call: the earliest of a drive's forecasts, and the day by which a doubtful drive is replaced.

Each forecast speaks of one limit, with an interval of its own. The margin is the forecast whose interval begins
first, as it stands: the first of several limits may well come before any one of them alone would, so that the
interval is a statement about that limit and never about the drive as a whole.
"""

from collections.abc import Iterable
from math import inf

from diskwatch.judge.language import _
from diskwatch.records import Call, CallWord, Forecast, Margin
from diskwatch.units import day_number

REPLACE_WITHIN = 14
"""Days from the call within which a drive called `copy` is to be replaced, where no limit comes earlier.

A deadline for the deed, no forecast (a rule of the house): of the drives of the open data that failed within 30
days of a damage measure of 7, four in seven did so within 14.
"""


def margin(forecasts: Iterable[Forecast], *, day: int) -> Margin:
    """The earliest of a drive's forecasts.

    Args:
        forecasts: of all its signals, as made last.
        day: today's UTC day number.

    Returns:
        The interval that begins first, of equal ones that which ends first, in days from today; else why
        nothing is known.
    """
    every = tuple(forecasts)
    known = [(_from_today(one, day), one) for one in every if one.low is not None and not _missed(one, day)]
    if not known:
        reasons = sorted({one.reason for one in every if one.reason})
        if not reasons and every:
            reasons = [_("what was forecast did not come in its time, and nothing newer was forecast")]
        return Margin(reason="; ".join(reasons) or _("no signal of this drive moves towards a limit"))
    (low, high), first = min(known, key=lambda pair: (pair[0][0], pair[0][1], pair[1].signal))
    return Margin(
        low=low,
        high=None if high == inf else high,
        probability=first.probability,
        signal=first.signal,
        limit=first.limit,
    )


def _missed(forecast: Forecast, day: int) -> bool:
    """Whether its time is over and the limit was not reached: one that was is forecast as 0 days."""
    return forecast.high is not None and 0 < forecast.high < day - forecast.made_on_day


def _from_today(forecast: Forecast, day: int) -> tuple[float, float]:
    """A forecast's interval in days from today."""
    gone = day - forecast.made_on_day
    low = 0.0 if forecast.low is None else max(0.0, forecast.low - gone)
    return low, inf if forecast.high is None else max(0.0, forecast.high - gone)


def replace_by(call: Call | None, left: Margin, *, day: int) -> int | None:
    """The UTC day number by which a drive called `copy` is to be replaced; None for every other call.

    Args:
        call: the call that stands.
        left: its margin.
        day: today's UTC day number.
    """
    if call is None or call.word is not CallWord.COPY:
        return None
    by = day_number(call.at) + REPLACE_WITHIN
    return by if left.low is None else min(by, max(day, day + int(left.low)))
