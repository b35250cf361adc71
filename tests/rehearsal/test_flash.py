import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.flash import THROTTLED, Cells, Chips, reads, writes
from diskwatch.rehearsal.rotating import Mix

CHIPS = Chips(capacity=500_000_000_000, turns=1_000, amplification=2.5)
MIX = Mix(size=131_072, sequential=0.5, cached=0.0, stroke=1.0)


@given(st.floats(0, 1e15))
def test_wear_is_write_amplification_times_bytes_over_capacity(written):
    assert CHIPS.worn_turns(written) == pytest.approx(2.5 * written / 5e11)


def test_the_share_used_passes_100_and_ends_at_255():
    # JESD218's rated endurance is no failure; the NVMe field ends at 255 (NVM Express, log page 02h).
    assert CHIPS.used_percent(2e14) == 100
    assert CHIPS.used_percent(2.1e14) == 105
    assert CHIPS.used_percent(1e17) == 255


def test_a_write_meets_a_cliff_only_when_the_cache_is_full_and_rest_empties_it():
    cells = Cells()
    assert cells.write(CHIPS, 30e9, 60.0) == 0.0
    assert cells.write(CHIPS, 300e9, 60.0) > 0.8
    assert cells.cached == CHIPS.cache
    assert cells.write(CHIPS, 0.0, 3_600.0) == 0.0
    assert cells.cached == 0.0


def test_beyond_the_cliff_writes_take_several_times_as_long_and_heat_slows_everything():
    fast = writes(CHIPS, MIX, cliff=0.0, throttled=False).mean_ms
    assert writes(CHIPS, MIX, cliff=1.0, throttled=False).mean_ms > 3 * fast
    cool, hot = (reads(CHIPS, MIX, throttled=throttled).mean_ms for throttled in (False, True))
    assert hot == pytest.approx(THROTTLED * cool)


def test_a_fresh_drive_keeps_its_reserve_and_a_worn_one_loses_it():
    fresh, worn, rng = Cells(), Cells(written=190e12), stream(1, "age")
    for cells in (fresh, worn):
        for _ in range(400):
            cells.write(CHIPS, 150e9, 86_400.0)
            cells.age(rng, CHIPS, 150e9, 1.0)
    assert fresh.spare_percent(CHIPS) == 100
    assert worn.spare_percent(CHIPS) < 97


@given(st.integers(0, 500), st.integers(0, 100))
def test_the_reserve_never_goes_below_nothing_and_bad_blocks_never_come_back(a_year, seed):
    cells, rng = Cells(losses=float(a_year)), stream(seed, "law")
    for _ in range(30):
        before = cells.bad_blocks
        cells.age(rng, CHIPS, 0.0, 60.0)
        assert before <= cells.bad_blocks <= CHIPS.spare_blocks
        assert 0 <= cells.spare_percent(CHIPS) <= 100
