from hypothesis import given, strategies as st

from diskwatch.judge.margin import REPLACE_WITHIN, margin, replace_by
from diskwatch.records import Call, CallWord, Cause, Forecast, Margin
from diskwatch.units import day_number
from tests.samples import DAY, NOON

TODAY = day_number(NOON)


def forecast(signal, low, high, *, made=TODAY, reason=None):
    return Forecast(
        signal=signal, limit=100, made_on_day=made, low=low, high=high, probability=0.8, reason=reason
    )


def call(word, at=NOON):
    return Call(
        word=word,
        at=at,
        cause=Cause.MEDIA,
        cause_probability=None,
        cause_second=None,
        reason="!",
        rule="x",
        evidence=None,
    )


def test_the_margin_is_the_forecast_whose_interval_begins_first():
    left = margin([forecast("percentage-used", 90, 400), forecast("available-spare", 60, None)], day=TODAY)
    assert (left.signal, left.low, left.high, left.probability) == ("available-spare", 60, None, 0.8)


def test_an_older_forecast_is_told_from_today_on():
    left = margin([forecast("percentage-used", 90, 400, made=TODAY - 30)], day=TODAY)
    assert (left.low, left.high) == (60, 370)


def test_a_limit_that_did_not_come_in_its_time_is_not_taken_for_reached():
    late = margin([forecast("percentage-used", 10, 20, made=TODAY - 30)], day=TODAY)
    assert not late.known
    assert late.reason == "what was forecast did not come in its time, and nothing newer was forecast"
    reached = margin([forecast("percentage-used", 0, 0, made=TODAY - 30)], day=TODAY)
    assert (reached.low, reached.high) == (0, 0)


def test_what_is_not_known_keeps_its_reason():
    left = margin([forecast("percentage-used", None, None, reason="too few steps so far")], day=TODAY)
    assert not left.known
    assert left.reason == "too few steps so far"
    assert margin([], day=TODAY).reason


def test_one_unknown_limit_hides_no_known_one():
    unknown = forecast("percentage-used", None, None, reason="too few steps so far")
    assert margin([unknown, forecast("available-spare", 5, 9)], day=TODAY).low == 5


@given(st.lists(st.tuples(st.floats(0, 1000), st.floats(0, 1000)), min_size=1, max_size=5), st.integers(0, 99))
def test_no_forecast_begins_before_the_margin_and_none_runs_below_today(ends, gone):
    every = [
        forecast(f"signal-{number}", min(pair), max(pair), made=TODAY - gone)
        for number, pair in enumerate(ends)
    ]
    left = margin(every, day=TODAY)
    open_still = [one for one in every if one.high == 0 or one.high >= gone]
    assert left.known == bool(open_still)
    if not left.known:
        return
    assert left.low == min(max(0.0, one.low - gone) for one in open_still)
    assert left.low is not None
    assert left.high is not None
    assert 0 <= left.low <= left.high


def test_only_a_copy_has_a_day_to_be_replaced_by_and_it_does_not_wander():
    far = Margin(low=300.0, high=500.0, probability=0.8, signal="percentage-used", limit=100)
    for word in CallWord:
        by = replace_by(call(word), far, day=TODAY + 3)
        assert by == (TODAY + REPLACE_WITHIN if word is CallWord.COPY else None)
    assert replace_by(None, far, day=TODAY) is None


def test_a_limit_that_comes_earlier_brings_the_day_forward_but_never_before_today():
    near = Margin(low=4.7, high=9.0, probability=0.8, signal="available-spare", limit=10)
    assert replace_by(call(CallWord.COPY), near, day=TODAY) == TODAY + 4
    reached = Margin(low=0.0, high=0.0, probability=0.8, signal="percentage-used", limit=100)
    assert replace_by(call(CallWord.COPY, NOON - DAY), reached, day=TODAY) == TODAY
