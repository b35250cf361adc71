"""The outlook in sentences, with what nobody knows."""

from diskwatch.judge.language import _
from diskwatch.judge.names import begun, happened, signal_name
from diskwatch.judge.outlook import FreshTrouble, LimitAhead
from diskwatch.trends.interval import Interval, bounded, words
from diskwatch.units import DAY, say_days


def limit_told(ahead: LimitAhead) -> str:
    """A limit and how likely it falls into the time."""
    one = ahead.forecast
    if one.high == 0:
        text = _("{signal}: its limit of {limit} is reached.")
        return text.format(signal=begun(signal_name(one.signal)), limit=f"{one.limit:g}")
    if ahead.high <= 0.5:
        text = _("{signal}: its limit of {limit} is reached {when}; within this time with {high} % at most.")
    elif ahead.low >= 0.5:
        text = _("{signal}: its limit of {limit} is reached {when}; within this time with {low} % at least.")
    else:
        text = _(
            "{signal}: its limit of {limit} is reached {when}; within this time with {low} to {high} %, which "
            "is all that can be said."
        )
    interval = bounded(Interval(low=one.low, high=one.high, probability=one.probability))
    return text.format(
        signal=begun(signal_name(one.signal)),
        limit=f"{one.limit:g}",
        when=words(interval, one.made_on_day * DAY),
        low=round(ahead.low * 100),
        high=round(ahead.high * 100),
    )


def fresh_told(fresh: FreshTrouble) -> str:
    """How likely a fresh occasion of trouble is."""
    text = (
        _(
            "{what}, once more: {chance} % at least, at the pace of its {count} occasions so far; a growing "
            "pace brings it sooner."
        )
        if fresh.under_way
        else _("{what}, at least once: {chance} %, after {count} occasions in {days} of powered time.")
    )
    return text.format(
        what=happened(fresh.stream),
        chance=round(fresh.chance * 100),
        count=fresh.episodes,
        days=say_days(max(1.0, fresh.powered_days)),
    )


def source() -> str:
    """Where the chances come from, and what they rest on."""
    return _(
        "Chances of fresh trouble come from a model, not from counted drives: rates that scatter as a gamma "
        "law of mean one in two years does, corrected by what the drive has shown. Limits come from the "
        "forecasts, with their intervals."
    )


def failure_unknown() -> str:
    """Why no chance of failure is given."""
    return _(
        "Whether it fails within this time is not known. The open data reach 30 days; about a quarter of "
        "failed hard drives, and half of the laptop kind, had shown nothing on their last day, and of drives "
        "of other kinds there are no such figures. Only a copy helps against that."
    )


def limit_unknown(signal: str, reason: str) -> str:
    """Why a limit cannot be dated."""
    return _("{signal}: when its limit is reached is not known: {reason}.").format(
        signal=begun(signal_name(signal)), reason=reason
    )
