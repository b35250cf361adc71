from dataclasses import replace

from diskwatch.records import Mount
from diskwatch.ticket.stake import copy_part
from tests.ticket.test_cautions import LINE


def test_what_is_to_be_copied_stands_in_its_order_with_hours_and_the_chance_of_a_bad_sector():
    place = replace(
        LINE.place,
        lives_here=(Mount(point="/", used_bytes=9 * 10**9), Mount(point="/srv/photos", used_bytes=10**12)),
    )
    told = copy_part(replace(LINE, place=place), ()).value
    assert isinstance(told, dict)
    assert [one["mounted_at"] for one in told["order"]] == ["/srv/photos", "/"]
    assert told["used_bytes"] == 1_009 * 10**9
    assert told["hours"]["low"] <= told["hours"]["high"]
    assert 0 < told["unreadable_chance"]["low"] <= told["unreadable_chance"]["high"] <= 1
    assert told["rate_measured"] is False


def test_a_drive_from_which_nothing_is_mounted_has_no_plan_but_a_reason():
    part = copy_part(LINE, ())
    assert part.value is None
    assert part.reason
