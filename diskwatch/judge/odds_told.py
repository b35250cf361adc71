"""What became of other drives that showed the same: always with the group, the years and an interval.

Whole numbers of a hundred, since the figures carry no more. Of a drive without such figures it is said that
there are none.
"""

from collections.abc import Mapping
from math import ceil

from diskwatch.judge.language import _, marked
from diskwatch.records import Kind, Odds

_SHARES: Mapping[str, str] = {
    "score-11": marked(
        "Among about {drives} data-centre hard drives of 2013 that came to a damage measure of 11, {low} to "
        "{high} of 100 had failed within {days} days."
    ),
    "score-9": marked(
        "Among about {drives} data-centre hard drives of 2013 that came to a damage measure of 9, {low} to "
        "{high} of 100 had failed within {days} days."
    ),
    "score-7": marked(
        "Among about {drives} data-centre hard drives of 2013 that came to a damage measure of 7, {low} to "
        "{high} of 100 had failed within {days} days."
    ),
    "both-rose": marked(
        "Among about {drives} data-centre hard drives of 2013 on which both replaced and unreadable sectors "
        "had grown, {low} to {high} of 100 had failed within {days} days."
    ),
    "first-rise-from-zero": marked(
        "Among about {drives} data-centre hard drives of 2013 that showed their first bad sectors, {low} to "
        "{high} of 100 had failed within {days} days."
    ),
    "pending-rose": marked(
        "Among about {drives} data-centre hard drives of 2013 on which unreadable sectors grew, {low} to "
        "{high} of 100 had failed within {days} days."
    ),
    "reallocated-rose": marked(
        "Among about {drives} data-centre hard drives of 2013 on which replaced sectors grew, {low} to {high} "
        "of 100 had failed within {days} days."
    ),
}

_BOUNDS: Mapping[str, str] = {
    "first-rise-after-14-days": marked(
        "Among about {drives} data-centre hard drives of 2013 whose bad sectors grew after two quiet weeks, "
        "fewer than {high} of 100 had failed within {days} days."
    ),
}


def odds_told(odds: Odds | None) -> str:
    """The odds in one sentence; nothing where there are none."""
    if odds is None:
        return ""
    drives = _about(odds.drives)
    if odds.share is None or odds.low is None:
        return _(_BOUNDS[odds.condition]).format(drives=drives, high=ceil(odds.high * 100), days=odds.days)
    return _(_SHARES[odds.condition]).format(
        drives=drives, low=round(odds.low * 100), high=round(odds.high * 100), days=odds.days
    )


def no_odds(kind: Kind) -> str:
    """Why there are no odds."""
    if kind is not Kind.HDD:
        return _("For drives of this kind we have no figures: the open data are of data-centre hard drives.")
    return _(
        "It has shown nothing within the last 30 days that the open data could be asked about. That is no "
        "promise: about a quarter of failed hard drives, and half of the laptop kind, had shown nothing on "
        "their last day."
    )


def what_failed_means() -> str:
    """The footnote to all odds."""
    return _(
        "Failed means that the operator took the drive out, partly because of these very counters. Those "
        "drives ran all day in a data centre; one at home is switched off, moved and hot. The interval is of "
        "chance alone: between models the share within 30 days ran from 0 to 28 of 100. The figures speak of "
        "others, not of this drive."
    )


def _about(count: int) -> int:
    """A number to two digits."""
    scale: int = 10 ** max(0, len(str(count)) - 2)
    return round(count / scale) * scale
