from dataclasses import replace

import msgspec

from diskwatch.records import ProbeDay
from diskwatch.trends import late_reads, probed
from diskwatch.trends.late_reads import BASELINE
from diskwatch.trends.probed import Probed
from diskwatch.units import DAY
from tests.trends.probes import TURN, band_reads, seeded, slice_times

RPM = 7200


def a_day(chance, number, *, retried=0.0003, slower=1.0, slices=100, behind=0):
    """One day's probe: 256 reads of a band, and a slice of which some requests are held up."""
    sliced = [round(1000 * one) for one in slice_times(chance, slices)]
    for place in range(behind):
        sliced[20 + 30 * place] += round(1000 * TURN)
    return ProbeDay(
        at=number * DAY + 3600,
        place=0,
        band_us=tuple(round(1000 * one) for one in band_reads(chance, 256, retried=retried, slower=slower)),
        slice_us=tuple(sliced),
        disk_ms=1800,
    )


def lived(chance, days, *, since=None, first=0, **kind):
    state = since
    for number in range(first, first + days):
        state = probed.after(state, a_day(chance, number, **kind), rotation_rpm=RPM)
    return state


def test_the_first_days_teach_what_is_usual_and_what_they_taught_is_let_go():
    chance = seeded(1)
    early = lived(chance, 11)
    assert not early.judges_late
    assert early.late.learnt == 11 * 256
    late = lived(chance, 6, since=early, first=11)
    assert late.judges_late
    assert late.late.slowest == ()
    assert late.speed.first == ()
    assert late.speed.reference is not None
    assert late.days == 17
    assert late.on == 16
    assert 4_000 < late.median_us < 7_000


def test_one_read_in_a_hundred_that_is_retried_alarms_within_a_week_or_little_more():
    sound = lived(seeded(2), 13)
    state = lived(seeded(3), 7, since=sound, first=13, retried=0.01)
    assert state.late.ledger.evidence >= late_reads.THRESHOLD


def test_slices_count_only_once_enough_came_without_a_late_one():
    chance = seeded(4)
    learning = lived(chance, 20)
    assert learning.slice_run == 2000
    fell = probed.after(learning, a_day(chance, 20, behind=1), rotation_rpm=RPM)
    assert fell.slice_run == 0
    assert fell.late.reads == learning.late.reads + 256, "its requests are not judged yet"
    open_ = lived(chance, 30, since=fell, first=21)
    assert open_.slice_run == BASELINE
    now = probed.after(open_, a_day(chance, 60, behind=2, retried=0.0), rotation_rpm=RPM)
    assert now.late.reads == open_.late.reads + 356
    assert now.late.late >= open_.late.late + 2
    assert now.slice_run == BASELINE


def test_a_read_that_never_came_back_is_late_and_has_no_time():
    sound = lived(seeded(5), 13)
    day = ProbeDay(at=14 * DAY, place=0, band_us=(None,), slice_us=(), disk_ms=9000)
    state = probed.after(sound, day, rotation_rpm=RPM)
    assert state.late.late == sound.late.late + 1
    assert state.median_us is None


def test_saved_and_loaded_it_goes_on_to_the_same_bits():
    kept = msgspec.json.decode(msgspec.json.encode(lived(seeded(6), 20)), type=Probed)
    assert lived(seeded(7), 5, since=kept, first=20) == lived(
        seeded(7), 5, since=lived(seeded(6), 20), first=20
    )


def test_what_the_owner_took_note_of_begins_anew_and_the_rest_goes_on():
    state = lived(seeded(9), 9, since=lived(seeded(8), 16), first=16, retried=0.02, slower=1.2)
    late = probed.noted(state, late=True, speed=False)
    assert late.late.ledger.evidence == 0.0
    assert late.late.norm > state.late.norm
    assert late.speed == state.speed
    speed = probed.noted(state, late=False, speed=True)
    assert speed.late == state.late
    assert speed.speed.reference is None
    assert probed.noted(state, late=False, speed=False) == replace(state)
