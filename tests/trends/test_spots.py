import csv
import gzip
from collections import defaultdict
from datetime import date

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends import spots
from diskwatch.trends.spots import COPY, RETIRE, Spots, fourfold, fresh, seen

COUNTS = st.integers(min_value=0, max_value=60_000)


def history(*days: tuple[int, int, int]) -> Spots:
    state = Spots()
    for day, replaced, pending in days:
        state = seen(state, day=day, replaced=replaced, pending=pending)
    return state


def test_the_first_reading_is_a_level_and_scores_nothing():
    assert fourfold(history((1, 4000, 300)), 1) == 0


def test_the_score_by_hand_in_single_counts():
    """0 -> 3 replaced and 0 -> 9 pending: R 12 (4 bits), P 9 (4), V 3 (2): S = 4 + 4 + 0.5."""
    assert fourfold(history((1, 0, 0), (2, 3, 9)), 2) == 4 * 4 + 4 * 4 + 2


def test_the_score_by_hand_where_counts_come_in_eights():
    """0 -> 8 and 0 -> 16 in eights: R 3 spots (2 bits), P 2 (2), V 1 (1): S = 4.25."""
    state = history((1, 0, 0), (2, 8, 16))
    assert fresh(state, 2) == 3
    assert fourfold(state, 2) == 4 * 2 + 4 * 2 + 1


def test_a_single_odd_value_turns_spots_into_counts_for_what_comes_after():
    state = history((1, 0, 0), (2, 8, 0), (3, 8, 1))
    assert state.rises == ((2, 1), (3, 1))
    assert not state.coarse


def test_fresh_damage_is_forgotten_after_fourteen_days():
    state = history((1, 0, 0), (2, 0, 5))
    assert fresh(state, 15) == 5
    assert fresh(state, 16) == 0
    assert fourfold(state, 16) == 0


def test_a_missing_value_is_skipped_and_the_base_stays():
    state = seen(history((1, 0, 4)), day=2, replaced=None, pending=None)
    assert seen(state, day=3, replaced=0, pending=6).rises == ((3, 2),)


def test_rises_within_a_day_add_up():
    assert history((1, 0, 0), (2, 1, 0), (2, 1, 2)).rises == ((2, 3),)


@given(replaced=COUNTS, pending=COUNTS, rise=st.integers(1, 5000), more=st.integers(1, 5000))
def test_more_fresh_damage_never_lowers_the_score(replaced, pending, rise, more):
    first = (1, replaced * 2 + 1, pending)  # odd: a spot is one count in both
    little = history(first, (2, first[1], pending + rise))
    much = history(first, (2, first[1], pending + rise + more))
    assert fourfold(much, 2) >= fourfold(little, 2)


@given(pending=COUNTS, replaced=COUNTS, more=st.integers(1, 5000))
def test_a_larger_old_total_never_lowers_the_score(pending, replaced, more):
    one = history((1, replaced, 1 + pending), (2, replaced, 2 + pending))
    other = history((1, replaced + more, 1 + pending), (2, replaced + more, 2 + pending))
    assert fourfold(other, 2) >= fourfold(one, 2)


def test_the_thresholds_are_seven_and_eleven():
    assert (COPY / 4, RETIRE / 4) == (7, 11)


def test_the_open_daily_drive_data_give_the_published_numbers_of_drives(shared):
    """415 drives with a rise, 133 that reach 7 (30 of them failed), 68 that reach 11 (23 failed).

    Open drive data of 2013, 40 days, 11,446 drives; check values on which two independent programs agreed.
    """
    path = shared / "drive_series" / "daily_2013-04-10_2013-05-19.csv.gz"
    if not path.is_file():
        pytest.skip("the daily drive data of 2013 are not here")
    rows = defaultdict(list)
    failed = set()
    with gzip.open(path, "rt", newline="") as file:
        for row in csv.DictReader(file):
            serial = row["serial_number"]
            rows[serial].append((row["date"], row["smart_5_raw"], row["smart_197_raw"]))
            if row["failure"] == "1":
                failed.add(serial)
    risen, copy, retire = set(), set(), set()
    for serial, days in rows.items():
        state = Spots()
        for when, replaced, pending in sorted(days):
            day = date.fromisoformat(when).toordinal()
            state = seen(state, day=day, replaced=_count(replaced), pending=_count(pending))
            score = fourfold(state, day)
            if fresh(state, day):
                risen.add(serial)
            if score >= spots.COPY:
                copy.add(serial)
            if score >= spots.RETIRE:
                retire.add(serial)
    assert len(risen) == 415
    assert (len(copy), len(copy & failed)) == (133, 30)
    assert (len(retire), len(retire & failed)) == (68, 23)


def _count(text: str) -> int | None:
    """65,000 and more is a full field, not a count."""
    return None if not text or float(text) >= 65_000 else int(float(text))
