from hypothesis import given, strategies as st

from diskwatch.judge.neighbours import REMEMBERED, WINDOW, Shared, Trouble, noted, shared, stays_with_bay

TODAY = 20_000
DAYS = st.lists(st.integers(TODAY - 40, TODAY), max_size=12).map(lambda days: tuple(sorted(set(days))))


def power(*days):
    return {"power": days}


def test_trouble_on_the_same_three_days_is_shared():
    days = (TODAY - 9, TODAY - 4, TODAY)
    assert shared(power(*days), [power(*days)], TODAY) == (Shared(kind=Trouble.POWER, days=3, drives=1),)


def test_one_power_cut_or_two_that_hit_every_drive_are_not_counted():
    days = (TODAY - 4, TODAY)
    assert shared(power(*days), [power(*days), power(*days)], TODAY) == ()


def test_what_a_drive_has_alone_as_often_is_its_own():
    together = (TODAY - 9, TODAY - 4, TODAY)
    alone = (TODAY - 11, TODAY - 8, TODAY - 2)
    own = tuple(sorted((*together, *alone)))
    assert shared(power(*own), [power(*together)], TODAY) == ()


def test_days_that_are_long_over_do_not_count():
    days = (TODAY - WINDOW, TODAY - 4, TODAY)
    assert shared(power(*days), [power(*days)], TODAY) == ()


def test_retracted_heads_bear_witness_to_power_that_went_away_elsewhere_and_to_nothing_else():
    days = (TODAY - 9, TODAY - 4, TODAY)
    assert shared({"retract": days}, [power(*days)], TODAY)[0].kind is Trouble.RETRACT
    assert shared({"retract": days}, [{"retract": days}], TODAY) == ()
    assert shared(power(*days), [{"retract": days}], TODAY)[0].kind is Trouble.POWER


def test_trouble_of_another_kind_is_not_shared():
    days = (TODAY - 9, TODAY - 4, TODAY)
    assert shared(power(*days), [{"heat": days}], TODAY) == ()


@given(st.lists(DAYS, max_size=4), DAYS)
def test_another_drive_with_the_same_trouble_never_makes_it_less_shared(others, own):
    every = [power(*days) for days in others]
    before = shared(power(*own), every, TODAY)
    assert len(shared(power(*own), [*every, power(*own)], TODAY)) >= len(before)


@given(st.lists(st.sampled_from(Trouble), max_size=3), st.integers(1, 90))
def test_days_are_noted_once_in_order_and_forgotten_in_time(kinds, later):
    first = noted({}, kinds, TODAY)
    assert noted(first, kinds, TODAY) == first
    assert all(days == (TODAY,) for days in first.values())
    after = noted(first, [Trouble.HEAT], TODAY + later)
    assert after["heat"][-1] == TODAY + later
    assert ("link" in after) is ("link" in first and later < WINDOW)


def test_trouble_of_a_bay_is_what_another_drive_had_in_it():
    assert stays_with_bay("one", [{"one": TODAY - 20}], TODAY)
    assert not stays_with_bay("two", [{"one": TODAY - 20}], TODAY)
    assert not stays_with_bay(None, [{"one": TODAY - 20}], TODAY)
    assert not stays_with_bay("one", [{"one": TODAY - REMEMBERED}], TODAY)
