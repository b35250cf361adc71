import csv
import gzip
import statistics
from dataclasses import replace
from itertools import accumulate, pairwise
from math import exp, log
from random import Random

import msgspec
import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.records import Direction
from diskwatch.trends import latency
from diskwatch.trends.latency import LAID_ASIDE, Latency, acknowledged, begin, evidence, moved
from diskwatch.trends.load import load_class
from diskwatch.trends.shift import Silence
from diskwatch.trends.slowness import KEPT, threshold
from diskwatch.trends.today import unpacked
from diskwatch.units import DAY
from tests.trends.traffic import a_day, invented_days, rollup


def lived(state, days, temperatures=None):
    """Take days in as the service does; gives the state after the last day and all shifts of reads."""
    shifts = []
    for number, rollups in enumerate(days):
        for one in rollups:
            if latency.ends_day(state, one):
                state, held = latency.close_day(state)
                shifts.append(held[0].shift)
            state = latency.arrive(state, one)
        state, held = latency.close_day(state, temperature=(temperatures or {}).get(number))
        shifts += [held[0].shift] if held else []
    return state, shifts


def batch_shifts(days):
    """All shifts of reads from all roll-ups at once: written anew, with nothing of the product but classes."""
    known: dict[int, list[float]] = {}
    shifts = []
    for rollups in days:
        found: dict[int, list[int]] = {}
        for one in rollups:
            mean = one.counts.read_ms / one.counts.reads
            found.setdefault(load_class(one, Direction.READ) or 0, []).append(round(1000 * log(mean)))
        pairs = []
        for cls, logs in sorted(found.items()):
            past = known.setdefault(cls, [])
            if len(logs) >= 3:
                middle = statistics.median(logs) / 1000
                if len(past) >= 12:
                    level, spread = centre_and_spread(past[:12])
                    pairs.append((middle - level, min(len(logs), 12) * (0.08 / spread) ** 2))
                past.append(middle)
        total = sum(weight for _, weight in pairs)
        if sum(len(logs) for logs in found.values()) >= 10 and len(pairs) >= 2 and total >= 4:
            pairs.sort()
            sums = accumulate(weight for _, weight in pairs)
            place = next(n for n, reached in enumerate(sums) if reached >= 0.3 * total * (1 - 1e-12))
            shifts.append(pairs[place][0])
    return shifts


def centre_and_spread(figures):
    middle = statistics.median(figures)
    return middle, max(0.08, 1.4826 * statistics.median(abs(one - middle) for one in figures))


def batch_evidence(shifts):
    if len(shifts) < 20:
        return None
    _, sigma = centre_and_spread(shifts[:20])
    sums = [0.0] * 4
    for shift in shifts[20:]:
        z = min(max((shift - log(1.20)) / sigma, -2.5), 2.5)
        sums = [
            min(1e15, (one + 1) * exp(rate * z - 0.75 * rate**2))
            for one, rate in zip(sums, (0.3, 0.6, 1.0, 1.5), strict=True)
        ]
    return sum(sums) / 4


@settings(max_examples=12)
@given(st.integers(0, 10**6), st.one_of(st.none(), st.integers(40, 120)))
def test_one_roll_up_at_a_time_equals_all_at_once_to_the_last_bit(seed, slower_from):
    days = invented_days(seed, 140, slower_from=slower_from)
    state, shifts = lived(begin(), days)
    expected = batch_shifts(days)
    assert [one for one in shifts if one is not None] == expected
    assert state.reads.evidence == batch_evidence(expected)


@settings(max_examples=12)
@given(st.integers(0, 10**6), st.lists(st.integers(0, 69), max_size=5), st.integers(0, 40))
def test_saving_and_loading_midway_changes_nothing(seed, at_days, within):
    days = invented_days(seed, 70)
    straight, _ = lived(begin(), days)
    state = begin()
    for number, rollups in enumerate(days):
        for place, one in enumerate(rollups):
            if number in at_days and place == within:
                state = msgspec.json.decode(msgspec.json.encode(state), type=Latency)
            state = latency.arrive(state, one)
        state, _ = latency.close_day(state)
        if number in at_days:
            state = msgspec.json.decode(msgspec.json.encode(state), type=Latency)
    assert state == straight


@settings(max_examples=8)
@given(st.integers(0, 10**6), st.integers(1, 5000))
def test_the_same_life_at_another_time_brings_the_same_evidence(seed, days_later):
    here, _ = lived(begin(), invented_days(seed, 70))
    there, _ = lived(begin(), invented_days(seed, 70, first_day=100 + days_later))
    assert evidence(there) == evidence(here)
    assert [one.day for one in there.reads.recent] == [one.day + days_later for one in here.reads.recent]


@settings(max_examples=8)
@given(st.integers(0, 10**6), st.floats(0.2, 50))
def test_a_drive_that_takes_any_number_of_times_as_long_from_the_start_has_the_same_shifts(seed, factor):
    """Times rounded to whole milliseconds and thousandths leave a hair's breadth between the two."""
    days = invented_days(seed, 60)
    slower = [
        [replace(one, counts=replace(one.counts, read_ms=round(one.counts.read_ms * factor))) for one in day]
        for day in days
    ]
    _, here = lived(begin(), days)
    _, there = lived(begin(), slower)
    assert [one is None for one in here] == [one is None for one in there]
    close = [abs(one - other) < 0.003 for one, other in zip(here, there, strict=True) if one is not None]
    # A weighted quantile may step to the next class where a spread moved by a hair.
    assert sum(close) >= 0.9 * len(close)


def test_drives_taken_in_turn_or_one_after_the_other_end_alike():
    lives = [invented_days(seed, 50) for seed in range(3)]
    after_another = [lived(begin(), days)[0] for days in lives]
    states = [begin()] * 3
    for day in range(50):
        for drive in (2, 0, 1):
            states[drive], _ = lived(states[drive], [lives[drive][day]])
    assert states == after_another


def test_reads_that_take_twice_as_long_reach_the_threshold_and_sound_ones_do_not():
    slow, _ = lived(begin(), invented_days(7, 130, slower_from=100))
    sound, _ = lived(begin(), invented_days(7, 130))
    assert evidence(slow)[Direction.READ] > threshold(Direction.READ)
    assert evidence(sound)[Direction.READ] < 10


def test_nothing_is_said_while_the_usual_times_are_learnt():
    state, shifts = lived(begin(), invented_days(1, 12))
    assert evidence(state) == {}
    assert shifts == [None] * len(shifts)


def test_a_new_kind_of_work_brings_silence_not_alarm():
    first = invented_days(3, 80)
    known, _ = lived(begin(), first)
    before = evidence(known)
    other = [a_day(day, {2**19: [40.0] * 12, 2**18: [30.0] * 12}) for day in range(200, 211)]
    after, shifts = lived(known, other)
    assert shifts == [None] * 11
    assert evidence(after) == before


def test_a_day_that_closes_without_roll_ups_changes_nothing():
    state, _ = lived(begin(), invented_days(2, 30))
    assert latency.close_day(state) == (state, ())


def test_a_gap_of_a_year_is_neither_counted_nor_forgotten():
    near, _ = lived(begin(), invented_days(4, 60))
    at_once, a_year_later = (invented_days(5, 10, first_day=day) for day in (160, 525))
    assert evidence(lived(near, a_year_later)[0]) == evidence(lived(near, at_once)[0])


def test_a_move_begins_new_references_and_a_return_goes_on_where_it_was():
    home, _ = lived(begin("port 1"), invented_days(6, 60))
    away = moved(home, "port 2")
    assert evidence(away) == {}
    assert away.reads.references == {}
    back = moved(lived(away, invented_days(6, 5, first_day=300))[0], "port 1")
    assert (back.reads, back.writes) == (home.reads, home.writes)
    assert [one.key for one in back.aside] == ["port 2"]
    assert moved(back, "port 1") is back


def test_what_had_arrived_on_the_day_of_a_move_is_given_up():
    state = latency.arrive(begin("port 1"), rollup(300))
    away = moved(state, "port 2")
    assert latency.close_day(away) == (away, ())
    assert latency.arrive(away, rollup(300)) == away


def test_only_a_few_earlier_circumstances_are_kept():
    state = begin("0")
    for place in range(1, 10):
        state = moved(state, str(place))
    assert [one.key for one in state.aside] == ["5", "6", "7", "8"]
    assert len(state.aside) == LAID_ASIDE


def test_taking_note_of_slow_reads_leaves_the_writes_alone():
    slow, _ = lived(begin(), invented_days(7, 130, slower_from=100))
    noted = acknowledged(slow, Direction.READ)
    assert noted.reads.evidence == 0
    assert noted.reads.tolerance > slow.reads.tolerance
    assert noted.writes == slow.writes
    assert acknowledged(noted, Direction.WRITE).writes.evidence == 0


def test_the_temperature_of_a_day_is_kept_beside_its_shift():
    state, _ = lived(begin(), invented_days(8, 30), dict.fromkeys(range(30), 41.0))
    assert {one.temperature for one in state.reads.recent} == {41.0}


def test_the_state_stays_small_however_long_one_watches():
    noise = Random(1)  # noqa: S311  # invented noise
    state, _ = lived(begin(), invented_days(9, 60))
    for day in range(1000, 1200):
        times = {
            2**octave: [exp(noise.gauss(1, 0.2)) for _ in range(24)]
            for octave in noise.sample(range(12, 20), 4)
        }
        state, _ = lived(state, [a_day(day, times, reads=noise.choice((100, 900, 4000, 15000, 60000)))])
    assert len(state.reads.recent) == KEPT
    assert len(state.reads.references) + len(state.writes.references) <= 240
    assert len(msgspec.json.encode(state)) < 120_000


def test_the_worst_day_of_roll_ups_is_bounded():
    state = begin()
    for minute in range(DAY // 60):
        state = latency.arrive(state, rollup((minute + 1) * 60, wall=60, writes=10))
    for later in range(300):
        state = latency.arrive(state, rollup(DAY - 60 + later % 60, wall=60))
    assert len(state.today.reads) == len(state.today.writes) == 3 * DAY // 60


def test_roll_ups_of_a_later_day_wait_until_the_open_one_is_closed():
    state = latency.arrive(begin(), rollup(300))
    assert latency.ends_day(state, rollup(DAY + 300))
    assert not latency.ends_day(begin(), rollup(DAY + 300))
    with pytest.raises(ValueError, match="close that day first"):
        latency.arrive(state, rollup(DAY + 300))


def test_recorded_traffic_of_one_endless_job_is_gathered_but_never_scored(shared):
    """Kernel counters of a 12 TB drive that is read end to end (origin in the data's own README)."""
    path = shared / "block_io" / "mdadm-sdc-2.csv.gz"
    with gzip.open(path, "rt", encoding="utf-8") as told:
        rows = list(csv.DictReader(told))
    names = ("reads", "sectors_read", "ms_reading", "t_ns")
    stretches: dict[int, list[int]] = {}
    for before, after in pairwise(rows):
        sums = stretches.setdefault(int(after["t_ns"]) // (300 * 10**9), [0] * len(names))
        for place, name in enumerate(names):
            sums[place] += int(after[name]) - int(before[name])
    state, held = begin(), []
    for slot, (reads, sectors, spent, covered) in sorted(stretches.items()):
        one = rollup(slot * 300 + 300, reads, covered=covered / 3e11)
        one = replace(one, counts=replace(one.counts, read_bytes=sectors * 512, read_ms=spent))
        if latency.ends_day(state, one):
            state, shifts = latency.close_day(state)
            held.append(shifts[0])
        state = latency.arrive(state, one)
    assert [shift.silence for shift in held] == [Silence.FEW_CLASSES]
    times = [exp(log_ / 1000) for _, log_ in unpacked(state.today.reads)]
    assert len(times) > 150
    assert 5 < min(times) <= max(times) < 50
