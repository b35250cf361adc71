import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.heat import Room, Spell, Warmth
from diskwatch.units import DAY

JULY = 20_289 * DAY  # 2025-07-20
JANUARY = 20_108 * DAY


def room(*spells):
    return Room(celsius=21.0, season=4.0, daily=1.5, spells=list(spells))


def test_a_room_is_warmest_on_a_summer_afternoon_and_coldest_in_a_winter_night():
    assert room().at(JULY + 16 * 3600) == pytest.approx(26.5, abs=0.1)
    assert room().at(JANUARY + 4 * 3600) == pytest.approx(15.5, abs=0.1)


def test_a_hot_spell_ends():
    hot = room(Spell(since=JULY, until=JULY + DAY, celsius=10.0))
    assert hot.at(JULY) - room().at(JULY) == pytest.approx(10)
    assert hot.at(JULY + DAY) == room().at(JULY + DAY)


def warmed(**more) -> float:
    warmth = Warmth(celsius=20.0, idle=10.0, load=8.0)
    for _ in range(10):
        warmth.live(20.0, **{"seconds": 3_600, "used": 0.0, "draught": 1.0, **more})
    return warmth.celsius


def test_load_warms_and_half_the_air_doubles_the_rise():
    assert warmed() == pytest.approx(30, abs=0.1)
    assert warmed(used=1.0) == pytest.approx(38, abs=0.1)
    assert warmed(draught=0.5) == pytest.approx(40, abs=0.1)


def test_time_above_a_limit_is_what_short_steps_of_the_same_curve_come_to():
    for start, air in ((20.0, 70.0), (75.0, 15.0), (20.0, 15.0), (80.0, 75.0)):
        whole, steps = (Warmth(celsius=start, idle=0.0, load=0.0) for _ in range(2))
        whole.rest(air, seconds=3_600)
        above = 0
        for _ in range(3_600):
            steps.rest(air, seconds=1)
            above += steps.celsius >= 45.0
        assert whole.above(45.0) == pytest.approx(above, abs=2)


@given(st.floats(0, 80), st.floats(10, 45), st.floats(1, 1e6))
def test_a_drive_at_rest_comes_nearer_to_the_room_and_never_beyond(start, air, seconds):
    warmth = Warmth(celsius=start, idle=10.0, load=8.0)
    warmth.rest(air, seconds=seconds)
    assert min(start, air) - 1e-9 <= warmth.celsius <= max(start, air) + 1e-9
