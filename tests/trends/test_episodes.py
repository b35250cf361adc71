import pytest
from hypothesis import given, strategies as st

from diskwatch.trends import episodes, ledger

NORM = 0.5 / 365.25


def lived(errors: set[int], last: int, *, norm: float = NORM) -> dict[int, float]:
    """A drive that is always on from day 1, with rises on some days: evidence at the end of each day."""
    stream = episodes.begin(1)
    evidence = {}
    for day in range(1, last + 2):
        if day > 1:
            stream = episodes.next_day(stream, day=day, exposure=1, norm_per_day=norm)
            evidence[day - 1] = stream.ledger.evidence
        if day in errors:
            stream = episodes.rise(stream, norm_per_day=norm)
    return evidence


def test_the_worked_example_of_a_media_counter():
    """Half an episode a year is the norm; rises on days 100, 104, 109, 140 and 200 (computed by two routes)."""
    evidence = lived({100, 104, 109, 140, 200}, 210)
    expected = {
        1: 0.958593,
        99: 43.232383,
        100: 588.649436,
        104: 588.649436,
        107: 588.649436,
        108: 559.86718,
        109: 20393.4983,
        140: 146737.842,
        200: 306600.435,
        210: 272915.800,
    }
    for day, value in expected.items():
        assert evidence[day] == pytest.approx(value, rel=1e-6), day


def test_an_episode_is_taken_at_once_and_not_at_the_end_of_its_day():
    stream = episodes.begin(1)
    assert episodes.rise(stream, norm_per_day=NORM).ledger.evidence > 0


def test_only_the_latest_episodes_keep_their_days():
    stream = episodes.begin(1)
    for day in range(2, 400):
        stream = episodes.next_day(stream, day=day, exposure=1, norm_per_day=NORM)
        if day % 20 == 0:
            stream = episodes.rise(stream, norm_per_day=NORM)
    assert stream.episodes == 19
    assert stream.opened == tuple((day, float(day)) for day in range(160, 400, 20))
    assert len(stream.opened) == episodes.REMEMBERED


def test_an_episode_is_kept_with_the_powered_days_seen_by_its_end():
    stream = episodes.next_day(episodes.begin(1), day=11, exposure=3.5, norm_per_day=NORM)
    assert episodes.rise(stream, norm_per_day=NORM).opened == ((11, 4.5),)


def test_a_second_rise_on_the_same_day_changes_nothing():
    once = episodes.rise(episodes.begin(1), norm_per_day=NORM)
    assert episodes.rise(once, norm_per_day=NORM) == once


@given(st.sets(st.integers(min_value=1, max_value=7)))
def test_whatever_happens_on_the_seven_days_after_an_opening_changes_nothing(others):
    plain = lived({50}, 80)
    crowded = lived({50} | {50 + day for day in others}, 80)
    assert plain == crowded


def test_the_eighth_day_after_an_opening_counts_again():
    assert lived({50, 58}, 60)[60] > lived({50}, 60)[60]


def test_a_gap_uses_up_absorption_and_only_the_rest_is_exposure():
    stream = episodes.rise(episodes.begin(1), norm_per_day=NORM)
    stream = episodes.next_day(stream, day=11, exposure=10, norm_per_day=NORM)
    after_gap = episodes.next_day(stream, day=12, exposure=1, norm_per_day=NORM)
    factors = ledger.count_factors(episode=False, exposure=3, norm_per_day=NORM)
    assert after_gap.ledger == ledger.after(stream.ledger, factors, 3)


def test_a_rise_somewhere_in_a_partly_absorbed_gap_is_left_out_altogether():
    opened = episodes.rise(episodes.begin(1), norm_per_day=NORM)
    stream = episodes.next_day(opened, day=11, exposure=10, norm_per_day=NORM)
    risen = episodes.rise(stream, norm_per_day=NORM)
    assert episodes.next_day(risen, day=12, exposure=1, norm_per_day=NORM).ledger == opened.ledger
    assert risen.episodes == 1


def test_days_cannot_go_backwards():
    with pytest.raises(ValueError, match="cannot follow"):
        episodes.next_day(episodes.begin(5), day=5, exposure=1, norm_per_day=NORM)


@given(days=st.integers(0, 4000), hours=st.one_of(st.none(), st.integers(-10, 100_000)))
def test_powered_time_in_a_gap_never_exceeds_the_calendar_and_is_never_negative(days, hours):
    assert 0 <= episodes.powered_between(days=days, hours=hours) <= days


def test_powered_time_follows_the_drives_own_hours_where_it_has_them():
    assert episodes.powered_between(days=30, hours=48) == 2
    assert episodes.powered_between(days=30, hours=None) == 30
