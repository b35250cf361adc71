"""How warm a drive runs, day by day, and the ledger that speaks where it runs hotter than it used to."""

from collections.abc import Iterable

from diskwatch.analyser.state import DriveState
from diskwatch.judge import warmth_told
from diskwatch.records import CallWord, Cause, Finding, FindingKind, Pass, Reading
from diskwatch.trends import temperature as temperatures
from diskwatch.trends.temperature import THRESHOLD, Temperature
from diskwatch.trends.warmth import Warmth, felt
from diskwatch.units import day_number

NAME = "drift:temperature"


def carried(state: DriveState, pass_: Pass, reading: Reading) -> tuple[tuple[Warmth, ...], Temperature]:
    """The latest days and the ledger after a reading; the first one of a day closes the day before it."""
    days, ended = felt(state.warmth, day=day_number(pass_.at), celsius=reading.number("temperature"))
    if ended is None:
        return days, state.temperature
    # As it comes back from text: 37 and 37.0 are one number and two texts.
    return days, temperatures.after_day(state.temperature, float(ended.highest), limit=limit_of(reading))


def limit_of(reading: Reading) -> int | None:
    """The highest temperature that the drive itself states for its work, degrees Celsius, or None."""
    return reading.warning_celsius if reading.warning_celsius is not None else reading.critical_celsius


def drift(state: DriveState, pass_: Pass, reading: Reading) -> Iterable[Finding]:
    """The ledger at or above its threshold."""
    ledger = state.temperature
    if ledger.usual is None or ledger.ledger.evidence < THRESHOLD:
        return ()
    line = temperatures.line(ledger, limit_of(reading))
    if line is None or len(state.warmth) < 2:
        return ()
    yesterday = state.warmth[-2]
    return (
        Finding(
            name=NAME,
            kind=FindingKind.DRIFT,
            signals=("temperature",),
            since=pass_.at,
            calls=CallWord.LOOK,
            cause=Cause.HEAT,
            evidence=ledger.ledger.evidence,
            sentence=warmth_told.hotter(
                highest=yesterday.highest, usual=ledger.usual, line=line, evidence=ledger.ledger.evidence
            ),
            data={
                "stream": "temperature",
                "signal": "temperature",
                "highest": yesterday.highest,
                "usual": ledger.usual,
                "line": line,
                "threshold": THRESHOLD,
                "last_day": day_number(pass_.at),
            },
        ),
    )
