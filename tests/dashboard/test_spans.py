import pytest

from diskwatch.dashboard.spans import ALL, begin_of, said
from diskwatch.units import DAY
from tests.dashboard.drives import NOW


@pytest.mark.parametrize(("span", "days"), [("day", 1), ("week", 7), ("month", 30), ("year", 365)])
def test_a_span_ends_now(span, days):
    assert begin_of(span, 0, NOW) == NOW - days * DAY
    assert said(span) == f"the last {span}"


def test_all_begins_with_the_first_sight_of_the_drive_and_is_never_shorter_than_a_day():
    assert begin_of(ALL, NOW - 99 * DAY, NOW) == NOW - 99 * DAY
    assert begin_of(ALL, NOW - 60, NOW) == NOW - DAY
    assert said(ALL) == "all that is known"
