import pytest

from diskwatch.judge.heard import FROM_NOTHING, facts
from diskwatch.records import CallWord, Cause

NOON = 1_796_126_400


@pytest.mark.parametrize("signal", sorted(FROM_NOTHING))
def test_every_count_from_nothing_asks_for_a_look_when_it_stands_above_its_base(signal):
    (one,) = facts({signal: 3}, {signal: 1}, at=NOON)
    assert one.calls is CallWord.LOOK
    assert one.signals == (signal,)
    assert "2 " in one.sentence
    assert not list(facts({signal: 3}, {signal: 3}, at=NOON))


def test_an_unreadable_place_points_to_the_medium_and_says_where_the_last_one_was():
    (one,) = facts({"unreadable-sectors": 1, "last-unreadable-sector": 4096}, {}, at=NOON)
    assert one.cause is Cause.MEDIA
    assert one.data == {"times": 1, "last_sector": 4096}
    assert "sector 4,096" in one.sentence


def test_what_is_not_counted_states_nothing():
    assert not list(facts({"link-resets": 9, "kernel-io-errors": 9, "degraded-arrays": 0}, {}, at=NOON))


def test_an_array_that_lacks_a_member_is_told_without_blaming_this_drive():
    (one,) = facts({"degraded-arrays": 2}, {}, at=NOON)
    assert one.cause is Cause.UNCLEAR
    assert "2 arrays" in one.sentence


def test_what_a_file_system_counted_before_the_watch_is_a_level():
    assert not list(facts({"ext4-errors": 12}, {}, at=NOON))
    (one,) = facts({"ext4-errors": 14}, {"ext4-errors": 12}, at=NOON)
    assert one.name == "fact:file-system"
    assert one.signals == ("ext4-errors",)


def test_errors_that_two_sources_saw_are_not_counted_twice():
    (one,) = facts({"file-system-errors": 2, "ext4-errors": 15}, {"ext4-errors": 12}, at=NOON)
    assert one.signals == ("file-system-errors", "ext4-errors")
    assert one.data == {"times": 3}
