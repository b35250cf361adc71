import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.trends import episodes
from diskwatch.trends.norms import NORMS
from tests.trends.simulators.quick import Quick, alarms

NORM = 0.5 / 365.25


def product(days, last, norm):
    """The product's own steps, a reading a day: evidence at the end of each day."""
    stream, evidence = episodes.begin(1), {}
    for day in range(1, last + 2):
        if day > 1:
            stream = episodes.next_day(stream, day=day, exposure=1, norm_per_day=norm)
            evidence[day - 1] = stream.ledger.evidence
        if day in days:
            stream = episodes.rise(stream, norm_per_day=norm)
    return evidence, stream.episodes


@settings(max_examples=25)
@given(
    st.lists(st.tuples(st.integers(1, 300), st.integers(0, 20)), max_size=12),
    st.sampled_from([norm.per_day for norm in NORMS]),
)
def test_the_closed_form_is_what_the_product_does_day_by_day(starts, norm):
    stretches = sorted((first, first + more) for first, more in starts)
    days = {day for first, last in stretches for day in range(first, last + 1)}
    expected, opened = product(days, 340, norm)
    quick = Quick(norm)
    found = list(quick.episodes(stretches))
    assert len(found) == opened
    for day, evidence in found:
        assert evidence == pytest.approx(expected[day], rel=1e-9)
    assert quick.until(340) == pytest.approx(expected[340], rel=1e-9)


def test_beyond_a_limit_a_quiet_day_always_lowers_the_evidence_however_it_came_about():
    for days in ([(10, 10), (40, 40)], [(5, 5), (15, 15), (300, 300)]):
        quick = Quick(NORM)
        last, before = list(quick.episodes(days))[-1]
        assert before > quick.slowest
        for day in range(last + 8, last + 2000):
            evidence = quick.until(day)
            assert evidence < before or before <= quick.slowest
            before = evidence


def test_every_threshold_of_the_product_lies_where_the_closed_form_is_exact():
    for norm in NORMS:
        assert norm.threshold > 20 * Quick(norm.per_day).slowest


def test_the_worked_example_alarms_on_its_third_episode_and_begins_anew():
    days = [(100, 100), (104, 104), (109, 109), (140, 140), (200, 200)]
    assert alarms(Quick(NORM), days, 9131.25)[0] == 109


def test_thresholds_that_a_quiet_stretch_could_reach_are_refused():
    with pytest.raises(ValueError, match="quiet stretches"):
        alarms(Quick(NORM), [], 100)
