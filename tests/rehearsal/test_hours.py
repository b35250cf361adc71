import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.clock import START
from diskwatch.rehearsal.hours import begins, begins_ever
from tests.rehearsal.examples import hdd, live, machine, scenario


@given(st.integers(0, 23), st.integers(60, 21_600))
def test_an_hour_begins_in_exactly_one_step_of_a_day(hour, seconds):
    steps = [
        at for at in range(START + seconds, START + 86_400 + seconds, seconds) if begins(hour, at, seconds)
    ]
    first, last = START + hour * 3_600, START + (hour + 24) * 3_600
    assert all(at - seconds < first <= at or at - seconds < last <= at for at in steps)
    assert 1 <= len(steps) <= 2


@pytest.mark.parametrize("habit", ["office", "home", "studio", "server"])
def test_a_self_test_begins_in_the_machine_exactly_where_its_hour_ever_does(habit):
    for hour in range(24):
        told = {"habit": habit, "backup_hour": hour, "step_minutes": 60, "days": 7}
        one = machine(hdd(self_tests_days=1), **told)
        live(one, 7)
        tested = any(drive.tests for drive in one.drives.values())
        assert tested is begins_ever(scenario(hdd(self_tests_days=1), **told), hour), hour
