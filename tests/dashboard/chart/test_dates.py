from datetime import UTC

import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.chart.dates import date_marks
from diskwatch.units import DAY
from tests.dashboard.drives import NOW


@pytest.mark.parametrize(
    ("days", "columns", "some"),
    [(1, 60, "18:00"), (7, 70, "1 Dec"), (30, 60, "16 Nov"), (365, 80, "Apr"), (3_650, 60, "2020")],
)
def test_dates_are_written_as_people_write_them(days, columns, some):
    assert some in [text for _, text in date_marks(NOW - days * DAY, NOW, columns, UTC)]


@given(st.integers(3_600, 4_000 * DAY), st.integers(9, 200))
def test_marks_lie_within_the_axis_in_order_and_have_room(length, columns):
    marks = date_marks(NOW - length, NOW, columns, UTC)
    times = [at for at, _ in marks]
    assert times == sorted(set(times))
    assert all(NOW - length < at < NOW for at in times)
    assert len(marks) <= max(columns // 9, 1)
