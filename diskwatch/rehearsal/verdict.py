"""Whether what a scenario expects came true."""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

from diskwatch.records import CallWord
from diskwatch.rehearsal.scenario import Expectation, Scenario
from diskwatch.rehearsal.story import Said, Story
from diskwatch.units import DAY, day_number


class Verdict(StrEnum):
    """What became of an expectation.

    Where the run ended before it could be settled: OPEN if the day by which it should be had not come,
    KEPT_SO_FAR if what must never be was not so far, and the scenario goes on.
    """

    REACHED = "reached"
    MISSED = "missed"
    TOO_EARLY = "too early"
    WRONG_CAUSE = "wrong cause"
    BROKEN = "broken"
    OPEN = "open"
    KEPT_SO_FAR = "kept so far"


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """An expectation of one drive and what became of it.

    Attributes:
        serial: the drive.
        wish: what was expected.
        verdict: what became of it.
        at: when that was settled, UTC seconds since 1970; None where nothing happened that settled it.
        day: the same in days since the beginning, or None.
    """

    serial: str
    wish: Expectation
    verdict: Verdict
    at: int | None
    day: float | None


def outcomes(scenario: Scenario, stories: Mapping[str, Story], *, start: int, end: int) -> tuple[Outcome, ...]:
    """Every expectation of every drive that it is about.

    Args:
        scenario: what was expected.
        stories: what was said, by serial.
        start: when the rehearsal began, UTC seconds since 1970.
        end: when it ended.
    """
    named = {wish.drive for wish in scenario.expect if wish.drive}
    return tuple(
        _outcome(wish, stories[serial], start=start, end=end, whole=start + scenario.days * DAY)
        for wish in scenario.expect
        for serial in ([wish.drive] if wish.drive else [one for one in stories if one not in named])
    )


def _outcome(wish: Expectation, story: Story, *, start: int, end: int, whole: int) -> Outcome:
    verdict, at = _judged(wish, story, start, end, whole=end >= whole)
    day = None if at is None else round((at - start) / DAY, 2)
    return Outcome(serial=story.serial, wish=wish, verdict=verdict, at=at, day=day)


def _judged(
    wish: Expectation, story: Story, start: int, end: int, *, whole: bool
) -> tuple[Verdict, int | None]:
    broken = next((one for one in story.said if _breaks(wish, one)), None)
    if broken is not None:
        return Verdict.BROKEN, broken.at
    if not story.said:
        return Verdict.OPEN if wish.call is None or end < _latest(wish, start) else Verdict.MISSED, None
    kept = wish.stays is not None or bool(wish.never_cause)
    if wish.foretells is not None:
        return _foretold(wish, wish.foretells, story, start, end)
    if wish.call is None:
        return Verdict.REACHED if whole else Verdict.KEPT_SO_FAR, None
    verdict, at = _reached(wish, wish.call, story, start, end)
    if verdict is Verdict.REACHED and kept and not whole:
        return Verdict.KEPT_SO_FAR, at
    return verdict, at


def _latest(wish: Expectation, start: int) -> float:
    return start + (wish.by_day or 0) * DAY


def _breaks(wish: Expectation, one: Said) -> bool:
    too_strong = wish.stays is not None and one.call.word.rank > wish.stays.rank
    return too_strong or one.call.cause in wish.never_cause


def _foretold(wish: Expectation, signal: str, story: Story, start: int, end: int) -> tuple[Verdict, int | None]:
    """Whether the last forecast up to the day says when, and comes true."""
    if end < _latest(wish, start):
        return Verdict.OPEN, None
    earliest, latest = start + wish.from_day * DAY, _latest(wish, start)
    made = [
        one
        for one in story.forecasts
        if one.signal == signal and one.high != 0 and earliest <= one.made_on_day * DAY <= latest
    ]
    if not made:
        return Verdict.MISSED, None
    held = made[-1].held(reached=story.reached.get(signal), seen_until=day_number(end))
    verdict = {True: Verdict.REACHED, False: Verdict.MISSED, None: Verdict.OPEN}[held]
    return verdict, made[-1].made_on_day * DAY


def _reached(
    wish: Expectation, call: CallWord, story: Story, start: int, end: int
) -> tuple[Verdict, int | None]:
    reached = [one for one in story.said if one.call.word.rank >= call.rank]
    earliest, latest = start + wish.from_day * DAY, _latest(wish, start)
    if not reached:
        return (Verdict.OPEN, None) if end < latest else (Verdict.MISSED, None)
    if reached[0].at < earliest:
        return Verdict.TOO_EARLY, reached[0].at
    named = [one for one in reached if wish.cause is None or one.call.cause is wish.cause]
    if not named:
        return Verdict.WRONG_CAUSE, reached[0].at
    return (Verdict.REACHED if named[0].at <= latest else Verdict.MISSED), named[0].at
