from dataclasses import replace
from random import Random

import pytest

from diskwatch import analyser
from diskwatch.judge import rules
from diskwatch.records import CallWord, Cause, Entry, Outcome, Settled
from diskwatch.units import DAY
from tests.analyser.lives import lived
from tests.samples import missed, read
from tests.trends.traffic import invented_days

FIRST = 100
KEY = "port-1 firmware-1"


def taken_in(days, *, state=None, latency=None, key=KEY, celsius=None):
    """A drive's days of traffic, each behind a pass of that day; gives the last state, latency, all entries."""
    state, latency = state or analyser.start(), latency or analyser.no_latency()
    happened: list[Entry] = []
    for rollups in days:
        day = (rollups[-1].at - 1) // DAY if rollups else None
        if day is None:
            continue
        if celsius is not None:
            warm = read(day * DAY + 3600, temperature=celsius(day), crc_errors=0)
            state = analyser.advance(state, warm).state
        at = (day + 1) * DAY + 4000
        step = analyser.take_in_traffic(state, latency, rollups, day=day, at=at, key=key)
        state, latency = step.state, step.latency
        happened += step.happened
    return state, latency, happened


@pytest.fixture(scope="module")
def slowed():
    return taken_in(invented_days(3, 110, slower_from=90, first_day=FIRST))


def test_slower_reads_at_equal_load_are_a_drift_that_stands(slowed):
    state, _, happened = slowed
    found = state.standing["drift:read-latency"]
    assert found.calls is CallWord.LOOK
    assert found.evidence == state.latency["read-latency"].evidence
    assert "times as long at the same load" in found.sentence
    assert rules.lasting(found)
    assert [entry.data["signal"] for entry in happened if entry.kind == "drift"] == [
        "read-latency",
        "write-latency",
    ]


def test_traffic_alone_leads_to_a_call_and_a_pass_without_a_reading_leaves_it(slowed):
    state, _, happened = slowed
    assert state.call.word is CallWord.LOOK
    assert state.call.rule in {"drift:read-latency", "drift:write-latency"}
    assert [entry.data["call"] for entry in happened if entry.kind == "call"] == ["look"]
    step = analyser.advance(state, missed(300 * DAY, Outcome.REFUSED))
    assert step.call is not None
    assert step.call.word is CallWord.LOOK
    assert step.call.at == state.call.at
    assert step.call.evidence == step.findings[0].evidence


def test_its_evidence_stands_among_the_drives(slowed):
    step = analyser.advance(slowed[0], missed(300 * DAY, Outcome.REFUSED))
    assert step.evidence["read-latency"] > 10 * 365.25


def test_an_even_pace_raises_no_alarm():
    state, _, happened = taken_in(invented_days(4, 150, first_day=FIRST))
    assert state.latency["read-latency"].evidence is not None
    assert not state.standing
    assert happened == []


def test_state_and_latency_saved_and_loaded_on_the_way_lead_to_the_same():
    days = invented_days(3, 110, slower_from=90, first_day=FIRST)
    state, latency, _ = taken_in(days[:50])
    state = analyser.load(analyser.dump(state))
    latency = analyser.load_latency(analyser.dump_latency(latency))
    state, latency, _ = taken_in(days[50:], state=state, latency=latency)
    whole, whole_latency, _ = taken_in(days)
    assert analyser.dump(state) == analyser.dump(whole)
    assert latency == whole_latency


def test_a_move_begins_new_references_and_is_told_and_the_way_back_too():
    days = invented_days(5, 60, first_day=FIRST)
    state, latency, _ = taken_in(days[:40])
    state, latency, moved = taken_in(days[40:45], state=state, latency=latency, key="port-2 firmware-1")
    assert [entry.kind for entry in moved] == ["moved"]
    assert state.latency["read-latency"].classes == 0
    state, _, back = taken_in(days[45:46], state=state, latency=latency)
    assert "hold again" in back[0].text
    assert state.latency["read-latency"].classes == 3


def test_slowness_that_follows_the_temperature_is_heat():
    noise = Random(6)  # noqa: S311  # invented weather
    warm = {day: noise.choice([30, 34, 46, 50]) for day in range(FIRST, FIRST + 200)}
    days = []
    for number, rollups in enumerate(invented_days(8, 120, first_day=FIRST)):
        slow = 1.0 + (warm[FIRST + number] - 30) / 20 if number >= 60 else 1.0
        days.append(rollups if slow == 1.0 else [_slower(one, slow) for one in rollups])
    state, _, _ = taken_in(days, celsius=warm.get)
    found = state.standing["drift:read-latency"]
    assert found.data["follows_heat"] is True
    assert found.cause is Cause.HEAT
    call = lived(read(400 * DAY, temperature=35, warning_celsius=60, crc_errors=0), state=state)[-1].call
    assert (call.cause, call.cause_probability) == (Cause.HEAT, None)


def _slower(rollup, times):
    counts = replace(
        rollup.counts,
        read_ms=round(rollup.counts.read_ms * times),
        write_ms=round(rollup.counts.write_ms * times),
    )
    return replace(rollup, counts=counts)


def test_slower_reads_are_a_sign_in_the_table_of_causes(slowed):
    """Beside a first bad sector they speak for a head."""
    state = slowed[0]
    last = (FIRST + 112) * DAY
    quiet = read(last, pending_sectors=0, crc_errors=0)
    hurt = read(last + DAY, pending_sectors=8, crc_errors=0)
    with_slowness = lived(quiet, hurt, state=state)[-1].call
    alone = lived(quiet, hurt)[-1].call
    assert alone.cause is Cause.MEDIA
    assert Cause.HEAD in {with_slowness.cause, with_slowness.cause_second}
    assert with_slowness.cause_probability != alone.cause_probability


def test_once_the_owner_took_note_only_a_further_slowing_speaks(slowed):
    state, latency, _ = slowed
    word = Settled(at=(FIRST + 111) * DAY, because="another use of it", signals=("read-latency",))
    state = analyser.settle(state, word).state
    assert "drift:read-latency" not in state.standing
    more = invented_days(9, 40, slower_from=0, first_day=FIRST + 112)
    state, _, happened = taken_in(more, state=state, latency=latency)
    assert "drift:read-latency" not in state.standing
    assert state.latency["read-latency"].tolerance > 0.5
    assert all(entry.data["signal"] != "read-latency" for entry in happened)


def test_measured_times_are_whole_microseconds_or_unknown_with_a_reason(slowed):
    values = {one.signal: one for one in analyser.measured(slowed[0])}
    assert values["read-latency"].unit == "microseconds"
    assert values["read-latency"].value in range(8_000, 11_000)
    young, _, _ = taken_in(invented_days(3, 5, first_day=FIRST))
    values = {one.signal: one for one in analyser.measured(young)}
    assert values["read-latency"].value is None
    assert values["read-latency"].reason


def test_what_latency_was_learnt_from_must_be_what_was_written():
    with pytest.raises(ValueError, match="Expected"):
        analyser.load_latency("[]")
