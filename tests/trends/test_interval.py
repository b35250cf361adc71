import msgspec
import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.interval import FAR, Interval, bounded, unknown, words
from diskwatch.units import epoch_of

NOW = epoch_of("2026-12-01")
ENDS = st.floats(0, 5000)


@pytest.mark.parametrize(
    ("low", "high", "said"),
    [
        (12.3, 29.2, "in 12 to 30 days"),
        (0.4, 0.9, "within 1 day"),
        (0.0, 6.2, "within 7 days"),
        (0.0, 0.0, "within 1 day"),
        (122.0, 380.0, "between April and December 2027"),
        (122.0, 480.0, "between April 2027 and March 2028"),
        (152.0, 160.0, "in May 2027"),
        (122.0, None, "between April 2027 and some time beyond 5 years"),
        (122.0, 2000.0, "between April 2027 and some time beyond 5 years"),
        (1826.25, 2000.0, "in more than 5 years"),
        (3000.0, None, "in more than 5 years"),
    ],
)
def test_an_interval_is_told_in_days_or_months_and_never_dated_beyond_five_years(low, high, said):
    assert words(Interval(low=low, high=high), NOW) == said


def test_what_is_not_known_is_told_with_its_reason():
    assert words(unknown("it was watched too briefly"), NOW) == "not known: it was watched too briefly"
    assert not unknown("it was watched too briefly").known


@given(low=ENDS, high=ENDS | st.none())
def test_no_end_beyond_five_years_is_left_to_be_shown(low, high):
    ends = sorted((low, high)) if high is not None else (low, None)
    shown = bounded(Interval(low=ends[0], high=ends[1]))
    assert shown.low is not None
    assert shown.low <= FAR
    assert shown.high is None or shown.high <= FAR
    assert bounded(shown) == shown


def test_what_is_not_known_stays_so_when_it_is_shown():
    assert bounded(unknown("no reading")) == unknown("no reading")


@given(low=ENDS, more=ENDS, at=st.integers(0, 4_000_000_000))
def test_every_interval_can_be_told(low, more, at):
    assert words(Interval(low=low, high=low + more), at)


@given(low=ENDS, more=ENDS)
def test_an_interval_comes_back_from_text_to_the_same_bits(low, more):
    interval = Interval(low=low, high=low + more, probability=0.8)
    assert msgspec.json.decode(msgspec.json.encode(interval), type=Interval) == interval


@pytest.mark.parametrize(
    ("low", "high", "probability", "reason"),
    [
        (3.0, 2.0, 0.8, None),
        (float("nan"), 2.0, 0.8, None),
        (1.0, float("inf"), 0.8, None),
        (1.0, 2.0, 1.0, None),
        (1.0, 2.0, 0.8, "too early"),
        (None, None, 0.8, None),
        (None, 2.0, 0.8, "too early"),
    ],
)
def test_what_is_no_interval_is_refused(low, high, probability, reason):
    with pytest.raises(ValueError, match="interval"):
        Interval(low=low, high=high, probability=probability, reason=reason)
