import pytest

from diskwatch.rehearsal.told import Row


@pytest.mark.parametrize(
    ("value", "worst", "threshold", "failing"),
    [(100, 100, 36, ""), (36, 36, 36, "now"), (40, 30, 36, "past"), (1, 1, 0, "")],
)
def test_an_attribute_fails_at_its_threshold_and_never_at_0(value, worst, threshold, failing):
    row = Row(number=5, name="Reallocated_Sector_Ct", raw=1, value=value, worst=worst, threshold=threshold)
    assert row.failing == failing
