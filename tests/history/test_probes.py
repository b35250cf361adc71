import pytest
from hypothesis import given, strategies as st

from diskwatch.history.probes import probes, times, write_probe
from diskwatch.records import ProbeDay
from tests.history.examples import DAY, NOON, a_drive, a_place

TIME = st.none() | st.integers(0, 2**40)


def a_probe(at=NOON, band=(5_100, None, 7_200), sliced=(2_000, 2_010)):
    return ProbeDay(at=at, place=2**41, band_us=tuple(band), slice_us=tuple(sliced), disk_ms=1_800)


def test_probes_come_back_whole_and_oldest_first(history):
    history.admit(a_drive(), a_place(), NOON)
    connection = history._db.conn
    for at in (NOON + DAY, NOON, NOON + 2 * DAY):
        write_probe(connection, 1, a_probe(at))
    assert probes(connection, 1) == (a_probe(NOON), a_probe(NOON + DAY), a_probe(NOON + 2 * DAY))
    assert probes(connection, 1, after=NOON) == (a_probe(NOON + DAY), a_probe(NOON + 2 * DAY))
    assert probes(connection, 2) == ()
    assert history.probes(1, after=NOON + DAY) == (a_probe(NOON + 2 * DAY),)


def test_one_that_is_written_twice_stands_once(history):
    history.admit(a_drive(), a_place(), NOON)
    for _ in range(2):
        write_probe(history._db.conn, 1, a_probe())
    assert probes(history._db.conn, 1) == (a_probe(),)


@pytest.mark.parametrize("told", [None, [], [[1]], [[1], 2], [[1], [True]], [[1], ["x"]], [[1], [-1]]])
def test_what_are_no_times_is_refused(told):
    with pytest.raises(ValueError, match=r"probe|number"):
        times(told)


@given(band=st.lists(TIME), sliced=st.lists(TIME))
def test_whatever_times_there_are_come_back(band, sliced):
    assert times([band, sliced]) == (tuple(band), tuple(sliced))
