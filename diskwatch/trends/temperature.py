"""The ledger of temperature: evidence that a drive runs hotter than it used to, or close to its own limit.

A proposal of this house; none of its figures has a source. Each day's highest temperature is held against a
*line*: 12 degrees above the median of the drive's first 30 days, but never closer than 5 degrees to the limit
that the drive itself states. Twelve degrees leave room for the seasons of an unheated room. The distance,
in units of the drive's own usual spread, goes into the recursion of the ledger of latency
(`diskwatch.trends.slowness`) and shares its assumption: on average, given the past, a sound drive's days lie at
or below the line. A summer that lies above it for weeks breaks that assumption: the drive is then said to be
hot, which it is. In simulated rooms whose seasons swing by 5 degrees to either side no drive alarmed; with 6
degrees one of 60 did in five years, with 8 a third. That a limit is exceeded is a fact, told at once by others;
this is about days that add up.
"""

from dataclasses import dataclass, field
from math import isfinite

from diskwatch.trends import ledger as ledgers
from diskwatch.trends.ledger import Ledger
from diskwatch.trends.middle import median, scaled_mad
from diskwatch.trends.norms import BUDGET
from diskwatch.trends.slowness import SUSPICIONS, factors

LEARNING = 30
"""Days that the usual temperature is learnt from."""

TOLERANCE = 12.0
"""Degrees above the usual that still count as sound."""

BELOW_LIMIT = 5.0
"""Degrees below the drive's own limit from which on its days count as hot."""

SHARE = 0.03
"""Part of the budget of one false drift alarm in ten years (`diskwatch.trends.norms`)."""

THRESHOLD = BUDGET / SHARE
"""Evidence in days at which temperature alarms."""

_LEAST_SPREAD = 2.0
_EMPTY = ledgers.empty(len(SUSPICIONS))


@dataclass(frozen=True, slots=True, kw_only=True)
class Temperature:
    """A drive's temperature through time; plain values, complete for a restart.

    Attributes:
        first: highest temperatures of the first days, degrees Celsius.
        usual: their median; None until learnt.
        sigma: their spread, at least 2 degrees; None until learnt.
        ledger: evidence so far.
    """

    first: tuple[float, ...] = ()
    usual: float | None = None
    sigma: float | None = None
    ledger: Ledger = field(default=_EMPTY)


def line(state: Temperature, limit: float | None) -> float | None:
    """The temperature up to which a day counts as sound; None while the usual one is being learnt.

    Args:
        state: the state.
        limit: highest temperature that the drive itself states for its work, or None where it states none.
    """
    if state.usual is None:
        return None
    relative = state.usual + TOLERANCE
    return relative if limit is None else min(relative, limit - BELOW_LIMIT)


def after_day(state: Temperature, highest: float, *, limit: float | None) -> Temperature:
    """Take in one powered day; a temperature that is no number changes nothing.

    Args:
        state: state before.
        highest: highest temperature of the day, degrees Celsius.
        limit: as for `line`.
    """
    if not isfinite(highest):
        return state
    bound = line(state, limit)
    if bound is None or state.sigma is None:
        first = (*state.first, highest)
        if len(first) < LEARNING:
            return Temperature(first=first)
        return Temperature(first=first, usual=median(first), sigma=max(_LEAST_SPREAD, scaled_mad(first)))
    ledger = ledgers.after(state.ledger, factors((highest - bound) / state.sigma))
    return Temperature(first=state.first, usual=state.usual, sigma=state.sigma, ledger=ledger)


def accepted(state: Temperature) -> Temperature:
    """The state after the owner has taken note of an alarm: the usual temperature is learnt anew."""
    return Temperature() if state.usual is not None else state
