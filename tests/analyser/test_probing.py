from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.records import CallWord, Cause, Entry, ProbeDay, Settled
from diskwatch.trends.latency_now import LatencyNow
from diskwatch.units import DAY
from tests.samples import HDD, read
from tests.trends.probes import seeded
from tests.trends.test_probed import RPM, a_day


def lived(state, days, *, first, seed, **kind):
    """Probes behind a reading of each day; gives the state and what happened."""
    chance = seeded(seed)
    happened: list[Entry] = []
    for number in range(first, first + days):
        state = analyser.advance(state, read(number * DAY, HDD, crc_errors=0)).state
        step = analyser.take_in_probe(state, a_day(chance, number, **kind), rotation_rpm=RPM)
        state = step.state
        happened += step.happened
    return state, happened


@pytest.fixture(scope="module")
def weak():
    sound, quiet = lived(analyser.start(), 16, first=100, seed=1)
    assert quiet == []
    return lived(sound, 8, first=116, seed=2, retried=0.03)


def test_late_reads_are_a_drift_that_asks_for_a_look(weak):
    state, happened = weak
    found = state.standing["drift:late-reads"]
    assert found.calls is CallWord.LOOK
    assert found.evidence == state.probe.late.ledger.evidence
    assert [entry.kind for entry in happened] == ["drift", "call"]
    assert "small reads of the probe were late" in found.sentence
    assert state.call.word is CallWord.LOOK


def test_the_next_reading_names_the_head_as_the_likeliest_cause(weak):
    step = analyser.advance(weak[0], read(124 * DAY, HDD, crc_errors=0))
    assert step.state.signs["late probe reads"] is True
    assert step.call is not None
    assert step.state.probe is not None
    assert step.call.cause is Cause.HEAD
    assert step.evidence["late-reads"] == step.state.probe.late.ledger.evidence
    assert "probe-latency" in step.evidence


def test_that_traffic_is_no_slower_does_not_clear_a_head_of_late_reads(weak):
    seen = LatencyNow(
        evidence=0.5, scored=40, classes=3, usual_us=6_000, shift=0.0, tolerance=0.2, onset=None,
        follows_heat=None, twice=None, seen_on=123,
    )  # fmt: skip  # one row
    both = {"read-latency": seen, "write-latency": seen}
    step = analyser.advance(replace(weak[0], latency=both), read(124 * DAY, HDD, crc_errors=0))
    assert "reads slower" not in step.state.signs
    assert step.state.signs["writes slower"] is False
    assert step.call is not None
    assert step.call.cause is Cause.HEAD


def test_late_reads_of_long_ago_are_no_sign_any_more(weak):
    step = analyser.advance(weak[0], read(200 * DAY, HDD, crc_errors=0))
    assert "late probe reads" not in step.state.signs


def test_a_disk_that_became_slower_all_over_is_a_drift_of_its_own():
    sound, _ = lived(analyser.start(), 16, first=100, seed=3)
    state, _ = lived(sound, 30, first=116, seed=4, slower=1.3)
    assert "drift:probe-latency" in state.standing
    assert "take 1." in state.standing["drift:probe-latency"].sentence


def test_a_probe_is_taken_in_once_however_often_it_comes(weak):
    state, _ = weak
    again = a_day(seeded(9), 123)
    assert again.at == state.probe.at
    assert analyser.take_in_probe(state, again, rotation_rpm=RPM).state is state


def test_the_owners_word_ends_it_and_only_a_worsening_speaks_again(weak):
    word = Settled(at=130 * DAY, because="the copy is up to date", signals=("late-reads",))
    settled = analyser.settle(weak[0], word).state
    assert "drift:late-reads" not in settled.standing
    assert settled.probe is not None
    assert settled.probe.late.norm > weak[0].probe.late.norm
    same, _ = lived(settled, 8, first=130, seed=5, retried=0.03)
    assert "drift:late-reads" not in same.standing
    other = Settled(at=130 * DAY, because="another cable", signals=("crc-errors",))
    assert analyser.settle(weak[0], other).state.probe == weak[0].probe


def test_its_values_stand_beside_the_drives_own_or_say_why_not(weak):
    values = {one.signal: one for one in analyser.probe_values(weak[0])}
    assert values["late-reads"].value == weak[0].probe.late.late
    assert values["probe-latency"].unit == "microseconds"
    early = analyser.take_in_probe(
        analyser.start(), ProbeDay(at=9, place=0, band_us=(None,), disk_ms=9_000), rotation_rpm=RPM
    ).state
    told = {one.signal: (one.value, one.reason) for one in analyser.probe_values(early)}
    assert told["late-reads"] == (None, "how long its reads usually take is still being learnt")
    assert told["probe-latency"] == (None, "none of the last probe's reads came back")
    assert analyser.probe_values(analyser.start()) == ()
