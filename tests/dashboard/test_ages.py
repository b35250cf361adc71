from datetime import timedelta, timezone

import pytest

from diskwatch.dashboard.ages import ago, clock, exact, since, within
from tests.dashboard.drives import NOW

EAST = timezone(timedelta(hours=1))


@pytest.mark.parametrize(
    ("passed", "told"),
    [
        (0, "just now"),
        (59, "just now"),
        (60, "1 minute ago"),
        (720, "12 minutes ago"),
        (7_300, "2 hours ago"),
        (3 * 86_400, "3 days ago"),
        (-60, "just now"),
        (-61, "at a time still to come"),
    ],
)
def test_the_past_is_told_in_its_largest_unit(passed, told):
    assert ago(NOW - passed, NOW) == told


@pytest.mark.parametrize(
    ("passed", "told"),
    [(60, "1 min ago"), (720, "12 min ago"), (3_600, "1 h ago"), (86_400 * 3, "3 days ago")],
)
def test_minutes_and_hours_have_a_short_form(passed, told):
    assert ago(NOW - passed, NOW, short=True) == told


def test_a_finding_of_today_is_told_by_the_hour():
    assert since(NOW - 3_600, NOW, EAST) == "since 15:00"


def test_a_finding_of_last_evening_is_told_by_its_weekday():
    assert since(NOW - 20 * 3_600, NOW, EAST) == "since Monday"


def test_a_finding_of_this_week_is_told_by_its_weekday():
    assert since(NOW - 3 * 86_400, NOW, EAST) == "since Saturday"


def test_an_older_finding_is_told_by_its_date():
    assert since(NOW - 7 * 86_400, NOW, EAST) == "since 24 November 2026"


def test_a_time_still_to_come_is_told_by_its_date():
    assert since(NOW + 86_400, NOW, EAST) == "since 2 December 2026"


def test_the_clock_tells_the_time_of_its_zone():
    assert clock(NOW, EAST) == "Tue 1 Dec 16:00"
    assert clock(NOW + 5, EAST, seconds=True) == "16:00:05"


def test_an_exact_time_names_its_distance_from_utc():
    assert exact(NOW, EAST) == "2026-12-01 16:00:00 +0100"


@pytest.mark.parametrize(
    ("low", "high", "told"),
    [
        (21, 53, "21 to 53 days"),
        (60, 100, "60 days to 3 months"),
        (1, 3, "1 to 3 days"),
        (400, 900, "13 months to 2 years"),
    ],
)
def test_two_lengths_of_one_unit_name_it_once(low, high, told):
    assert within(low, high) == told
