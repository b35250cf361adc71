from dataclasses import replace

from hypothesis import given, strategies as st

from diskwatch.machine.protocol import Counted
from diskwatch.machine.standstill import HUNG, Standing, looked
from diskwatch.records import IoCounts

NOTHING = IoCounts(reads=0, writes=0, read_bytes=0, write_bytes=0, read_ms=0, write_ms=0, busy_ms=0)


def look(reads: int, in_flight: int | None, instance: str = "disk 1", flushes: int | None = None) -> Counted:
    return Counted(
        counts=replace(NOTHING, reads=reads, flushes=flushes), instance=instance, in_flight=in_flight
    )


def lived(*looks: Counted, every: float = 10.0) -> Standing:
    state = None
    for number, one in enumerate(looks):
        state = looked(state, one, number * every)
    assert state is not None
    return state


def test_requests_that_do_not_move_for_half_a_minute_are_a_hung_drive():
    stuck = look(5, 3)
    assert not lived(stuck, stuck, stuck).hung
    state = lived(stuck, stuck, stuck, stuck)
    assert (state.hung, state.seconds, state.in_flight) == (True, 30.0, 3)


def test_looks_that_come_a_little_early_put_off_the_telling_by_none():
    assert lived(*[look(5, 3)] * 4, every=9.99).hung
    assert not lived(*[look(5, 3)] * 4, every=9.8).hung


def test_looks_every_ten_seconds_tell_it_within_a_minute_of_the_last_answer():
    moving, stuck = look(4, 1), look(5, 1)
    assert lived(moving, stuck, stuck, stuck, stuck).hung


def test_a_single_answer_begins_the_time_anew():
    stuck = look(5, 3)
    state = lived(stuck, stuck, stuck, stuck, look(6, 3))
    assert (state.hung, state.seconds) == (False, 0.0)


def test_an_answer_to_a_flush_is_an_answer_too():
    assert not lived(*(look(5, 1, flushes=number) for number in range(5))).hung


def test_an_idle_drive_is_not_hung_however_long_nothing_completes():
    assert not lived(*[look(5, 0)] * 50).hung
    assert not lived(*[look(5, None)] * 50).hung


def test_a_request_that_ended_between_two_looks_leaves_no_time_behind():
    assert lived(look(5, 1), look(6, 0), look(6, 1)).seconds == 0.0


def test_another_device_under_the_name_inherits_no_standstill():
    stuck = look(5, 1)
    assert not lived(stuck, stuck, stuck, replace(stuck, instance="disk 2")).hung


@given(st.lists(st.tuples(st.integers(0, 1), st.integers(0, 2)), min_size=1), st.floats(0.1, 60.0))
def test_a_standstill_never_lasts_longer_than_the_looks_without_an_answer(
    steps: list[tuple[int, int]], every: float
):
    done, quiet, state = 0, 0, None
    for number, (more, in_flight) in enumerate(steps):
        done += more
        state = looked(state, look(done, in_flight), number * every)
        quiet = 0 if more or in_flight == 0 else quiet + 1
        assert state.seconds <= quiet * every + 1e-6
        assert state.hung == (state.seconds >= HUNG - 0.5)
        assert (state.since is None) == (in_flight == 0)
