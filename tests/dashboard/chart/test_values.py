import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.chart.values import say_mark, say_value


@pytest.mark.parametrize(
    ("value", "unit", "told"),
    [
        (24, "sectors", "24 sectors"),
        (41, "celsius", "41 °C"),
        (12_000_000_000_000, "bytes", "12 TB"),
        ("passed", "", "passed"),
        (61_000, "opaque", "61,000"),
        (30_000, "hours", "30,000 h (3 years)"),
        (36.5, "celsius", "36.5 °C"),
    ],
)
def test_values_are_told_with_their_units(value, unit, told):
    assert say_value(value, unit) == told


@pytest.mark.parametrize(
    ("value", "told"), [(0, "0"), (100, "100"), (2_000, "2k"), (12_345, "12.3k"), (1_500_000, "1.5M")]
)
def test_marks_are_short(value, told):
    assert say_mark(value, "events") == told


@given(st.floats(0, 1e14), st.sampled_from(["bytes", "events", "celsius"]))
def test_no_mark_is_wider_than_the_margin(value, unit):
    assert len(say_mark(value, unit)) <= 6
