"""Sentences about single forecasts, and how earlier ones fared; the margin: `diskwatch.judge.margin_told`."""

from collections.abc import Iterable, Mapping

from diskwatch.judge.language import _, marked
from diskwatch.records import Forecast, LimitSource
from diskwatch.trends.interval import Interval, bounded, words
from diskwatch.units import day_number

_REACHED: Mapping[str, str] = {
    "percentage-used": marked("Rated endurance used up ({limit} %, {source}): {when}."),
    "available-spare": marked("Spare blocks down to {limit} % ({source}): {when}."),
    "read-latency": marked("Reads taking twice as long as usual ({source}): {when}."),
    "media-episodes": marked("Occasion {limit} with new bad spots ({source}): {when}."),
    "flash-media-episodes": marked(
        "Occasion {limit} on which stored data is not recovered ({source}): {when}."
    ),
    "write-latency": marked("Writes taking twice as long as usual ({source}): {when}."),
}

_SOURCES: Mapping[LimitSource, str] = {
    LimitSource.DRIVE: marked("the drive's own limit"),
    LimitSource.STANDARD: marked("the maker's rating, as the standard counts it"),
    LimitSource.OWN: marked("against its own past"),
    LimitSource.USUAL: marked("a limit that is usual among makers, since the drive states none"),
}


def alarm_over() -> str:
    """Why nothing is forecast any longer, as a part of a sentence."""
    return _("its alarm is over")


def days_not_kept() -> str:
    """Why episodes that came before this version cannot be forecast from, likewise."""
    return _("the days of its earlier episodes were not kept yet")


def forecast(made: Forecast, at: int) -> str:
    """When a signal is to be expected at its limit, or why that is not known.

    Args:
        made: the forecast.
        at: now, UTC seconds since 1970.
    """
    text = _(_REACHED[made.signal]) if made.signal in _REACHED else _("{signal} at {limit} ({source}): {when}.")
    return text.format(
        signal=made.signal.replace("-", " "),
        limit=f"{made.limit:g}",
        source=_(_SOURCES[made.limit_from]),
        when=_when(made, at),
    )


def _when(made: Forecast, at: int) -> str:
    if made.low is None:
        return words(Interval(low=None, high=None, probability=made.probability, reason=made.reason), at)
    if made.high == 0:
        return _("reached")
    gone = max(0, day_number(at) - made.made_on_day)
    low, high = max(0.0, made.low - gone), None if made.high is None else made.high - gone
    if high is not None and high <= 0:
        return _("expected by now, and not reached")
    told = words(bounded(Interval(low=low, high=high, probability=made.probability)), at)
    return _("{when}, with {probability} %").format(when=told, probability=f"{100 * made.probability:.0f}")


def fared(kept: Iterable[tuple[Forecast, int | None]], *, seen_until: int) -> str | None:
    """How many of the forecasts that are decided came true; None while none is.

    Args:
        kept: each with the UTC day number on which its limit was reached, or None.
        seen_until: UTC day number up to which the drive was watched.
    """
    outcomes = [one.held(reached=reached, seen_until=seen_until) for one, reached in kept if one.high != 0]
    decided = [one for one in outcomes if one is not None]
    if not decided:
        return None
    return _("Of {decided} earlier forecasts whose time is over, {held} came true.").format(
        decided=len(decided), held=sum(decided)
    )
