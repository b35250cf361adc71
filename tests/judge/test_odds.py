import csv
import io
from importlib.resources import files

import pytest
from hypothesis import given, strategies as st

from diskwatch.judge import odds
from diskwatch.records import Kind
from tests.judge import hazard

BEGIN = {
    "day": 100,
    "fourfold": 8,
    "risen": (False, True),
    "from_zero": False,
    "watched": 3,
}


def shown(before=None, **changes):
    return odds.shown(before or {}, **{**BEGIN, **changes})


def test_the_table_is_what_the_recipe_makes_of_the_open_data(shared):
    made = hazard.table(hazard.lives(shared / hazard.FILE).values())
    text = files("diskwatch.judge").joinpath("odds.csv").read_text(encoding="utf-8")
    kept = {(row["condition"], int(row["horizon_days"])): row for row in csv.DictReader(io.StringIO(text))}
    assert kept.keys() == {(row.condition, row.horizon) for row in made}
    for row in made:
        there = kept[row.condition, row.horizon]
        assert (int(there["drives"]), int(there["failed"]), there["say"]) == (row.drives, row.failed, row.say)
        numbers = [float(there[name]) for name in ("probability", "low80", "high80", "low95", "high95")]
        assert numbers == pytest.approx([row.probability, *row.intervals], abs=1e-6)


def test_the_recipe_gives_the_figures_that_a_second_program_found(shared):
    """Checked against a table worked out by another program from the same file, to its five digits.

    Any rise: 415 drives, 12, 23 and 35 failed, 0.030490, 0.060483, 0.100178 within 7, 14 and 30 days, effective
    numbers 393.30, 379.07 and 340.55. Measure of 7: 133, 30, 0.263979, 107.42. Measure of 11: 68, 23, 0.413744.
    """
    made = {
        (row.condition, row.horizon): row
        for row in hazard.table(hazard.lives(shared / hazard.FILE).values(), (7, 14, 30))
    }
    rose = [made["either-rose", days] for days in (7, 14, 30)]
    assert [(row.drives, row.failed) for row in rose] == [(415, 12), (415, 23), (415, 35)]
    assert [row.probability for row in rose] == pytest.approx([0.030490, 0.060483, 0.100178], abs=5e-7)
    assert [row.effective for row in rose] == pytest.approx([393.30, 379.07, 340.55], abs=0.005)
    seven, eleven = made["score-7", 30], made["score-11", 30]
    assert (seven.drives, seven.failed, eleven.drives, eleven.failed) == (133, 30, 68, 23)
    assert (seven.probability, seven.effective) == pytest.approx((0.263979, 107.42), abs=0.005)
    assert eleven.probability == pytest.approx(0.413744, abs=5e-7)


def test_an_interval_holds_its_share_and_the_wider_bound_lies_above():
    for row in odds.table().values():
        assert 0 < row.low < row.share < row.high < row.bound < 1


def test_every_condition_that_is_used_has_a_row():
    conditions = {condition for condition, _ in odds.table()}
    assert set(odds.ORDER) <= conditions


def test_the_most_specific_row_that_holds_is_used():
    showed = dict.fromkeys(odds.ORDER, 100)
    for condition in odds.ORDER:
        found = odds.odds(showed, day=101)
        assert found is not None
        assert found.condition == condition
        del showed[condition]
    assert odds.odds(showed, day=101) is None


def test_odds_end_with_the_horizon_of_the_data():
    found = odds.odds({"score-7": 100}, day=129)
    assert found is not None
    assert (found.days, found.drives, found.failed) == (30, 133, 30)
    assert odds.odds({"score-7": 100}, day=130) is None
    assert odds.odds({"score-7": 100}, day=99) is None


def test_where_few_failed_only_an_upper_bound_is_given():
    found = odds.odds({"first-rise-after-14-days": 100}, day=113)
    assert found is not None
    assert (found.share, found.low, found.days) == (None, None, 14)
    assert found.high == pytest.approx(0.095818)
    assert odds.odds({"first-rise-after-14-days": 100}, day=114) is None


def test_the_source_names_data_years_number_and_method():
    found = odds.odds({"both-rose": 100}, day=100)
    assert found is not None
    for part in ("2013", "49 data-centre hard drives", "16", "30 days", "Clopper-Pearson", "80 %"):
        assert part in found.source


def test_only_hard_drives_on_a_port_of_their_own_have_figures():
    assert [kind for kind in Kind if odds.known_for(kind)] == [Kind.HDD]


def test_the_first_rise_is_told_from_later_ones_and_new_trouble_from_old():
    assert shown() == {"pending-rose": 100}
    assert shown(from_zero=True) == {"pending-rose": 100, "first-rise-from-zero": 100}
    assert shown(watched=14) == {"pending-rose": 100, "first-rise-after-14-days": 100}
    later = shown({"pending-rose": 90}, risen=(True, False), watched=50, from_zero=True)
    assert later == {"pending-rose": 90, "reallocated-rose": 100, "both-rose": 100}


@given(st.integers(0, 80), st.tuples(st.booleans(), st.booleans()), st.booleans(), st.integers(0, 40))
def test_a_condition_keeps_the_day_on_which_it_first_showed(fourfold, risen, from_zero, watched):
    first = shown(fourfold=fourfold, risen=risen, from_zero=from_zero, watched=watched)
    again = shown(first, day=120, fourfold=fourfold, risen=risen, from_zero=from_zero, watched=watched)
    assert {name: again[name] for name in first} == first
