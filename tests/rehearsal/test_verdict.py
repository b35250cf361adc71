from typing import Any

import pytest

from diskwatch.records import Call, CallWord, Cause, Forecast
from diskwatch.rehearsal.scenario import Expectation
from diskwatch.rehearsal.story import Said, Story
from diskwatch.rehearsal.verdict import Verdict, outcomes
from tests.rehearsal.examples import HDD, NVME, scenario

DAY = 86_400


def said(day: float, word: str, cause: str | None = None) -> Said:
    call = Call(
        word=CallWord(word),
        at=int(day * DAY),
        cause=Cause(cause) if cause else None,
        cause_probability=None,
        cause_second=None,
        reason="x",
        rule="x",
        evidence=None,
    )
    return Said(at=call.at, call=call, changed=True)


def judged(wish: dict[str, Any], *told: Said, end: float = 100) -> Verdict:
    expectation = Expectation(**{"drive": HDD, "because": "x", **wish})
    story = Story(serial=HDD, model="x", said=[said(0, "keep"), *told])
    stories = {HDD: story, NVME: Story(serial=NVME, model="y")}
    (one,) = outcomes(scenario(expect=(expectation,)), stories, start=0, end=int(end * DAY))
    return one.verdict


def kept(wish: dict[str, Any], *told: Said, end: float = 100) -> str:
    return judged(wish, *told, end=end).value


LOOK = {"call": CallWord.LOOK, "cause": Cause.MEDIA, "from_day": 10, "by_day": 20}


@pytest.mark.parametrize(
    ("told", "end", "verdict"),
    [
        ((said(12, "look", "media"),), 100, "reached"),
        ((said(12, "retire", "media"),), 100, "reached"),
        ((said(12, "look", "link"), said(19, "copy", "media")), 100, "reached"),
        ((said(12, "look", "link"),), 100, "wrong cause"),
        ((said(9, "look", "media"),), 100, "too early"),
        ((said(21, "look", "media"),), 100, "missed"),
        ((), 100, "missed"),
        ((), 15, "open"),
    ],
)
def test_a_call_is_reached_in_its_time_and_for_its_cause(told, end, verdict):
    assert judged(LOOK, *told, end=end) is Verdict(verdict)


def test_what_must_not_be_is_broken_once_it_was():
    wish = {"stays": CallWord.LOOK, "never_cause": (Cause.LINK,)}
    assert judged(wish, said(5, "look", "media")) is Verdict.REACHED
    assert judged(wish, said(5, "copy", "media"), said(6, "keep")) is Verdict.BROKEN
    assert judged(wish, said(5, "look", "link")) is Verdict.BROKEN


def test_what_must_never_be_is_kept_only_when_the_whole_scenario_is_over():
    # The scenario of these tests lasts 30 days.
    wish = {"stays": CallWord.LOOK, "never_cause": (Cause.LINK,)}
    assert [kept(wish, said(2, "look", "media"), end=end) for end in (5, 29, 30, 31)] == [
        "kept so far",
        "kept so far",
        "reached",
        "reached",
    ]
    assert kept(wish, said(2, "copy", "media"), end=5) == "broken", "what was broken stays so"


def test_a_call_that_must_never_be_exceeded_is_settled_only_at_the_end():
    wish = {**LOOK, "stays": CallWord.LOOK}
    assert kept(wish, said(12, "look", "media"), end=15) == "kept so far"
    assert kept(wish, said(12, "look", "media"), end=30) == "reached"
    assert kept(wish, end=15) == "open"


def foretold(*made: Forecast, reached: int | None, end: int = 30) -> Verdict:
    wish = Expectation(drive=HDD, foretells="available-spare", by_day=10, because="x")
    story = Story(serial=HDD, model="x", said=[said(0, "keep")], forecasts=list(made))
    if reached is not None:
        story.reached["available-spare"] = reached
    (one,) = outcomes(scenario(expect=(wish,)), {HDD: story}, start=0, end=end * DAY)
    return one.verdict


def forecast(day: int, low: float, high: float | None, signal: str = "available-spare") -> Forecast:
    return Forecast(signal=signal, limit=10, made_on_day=day, low=low, high=high, probability=0.8, reason=None)


def test_what_is_foretold_in_time_and_comes_true_is_reached():
    early, late = forecast(3, 90, 99), forecast(9, 10, 15)
    assert foretold(early, late, reached=21) is Verdict.REACHED, "the last one up to the day counts"
    assert foretold(early, late, forecast(11, 1, 2), reached=25) is Verdict.MISSED
    assert foretold(early, late, reached=None) is Verdict.MISSED, "its interval is over"
    assert foretold(forecast(9, 10, 40), reached=None) is Verdict.OPEN
    assert foretold(forecast(11, 10, 15), reached=21) is Verdict.MISSED, "too late"
    assert foretold(forecast(9, 10, 15, "percentage-used"), reached=21) is Verdict.MISSED
    assert foretold(late, reached=None, end=9) is Verdict.OPEN


def test_nothing_is_settled_of_a_drive_that_was_never_asked():
    story = Story(serial=HDD, model="x")
    cases: tuple[tuple[dict[str, Any], int, Verdict], ...] = (
        (LOOK, 15, Verdict.OPEN),
        (LOOK, 30, Verdict.MISSED),
        ({"stays": CallWord.KEEP}, 30, Verdict.OPEN),
    )
    for wish, end, verdict in cases:
        expectation = Expectation(**{"drive": HDD, "because": "x", **wish})
        told = outcomes(scenario(expect=(expectation,)), {HDD: story}, start=0, end=end * DAY)
        assert [one.verdict for one in told] == [verdict]


def test_an_expectation_without_a_drive_is_of_all_that_no_other_names():
    wishes = (
        Expectation(stays=CallWord.KEEP, because="x"),
        Expectation(drive=HDD, stays=CallWord.LOOK, because="y"),
    )
    stories = {serial: Story(serial=serial, model="x", said=[said(0, "keep")]) for serial in (HDD, NVME)}
    told = outcomes(scenario(expect=wishes), stories, start=0, end=DAY)
    assert [(one.serial, one.wish.because) for one in told] == [(NVME, "x"), (HDD, "y")]
