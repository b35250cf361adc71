import pytest

from diskwatch import analyser
from diskwatch.analyser.timing import joint, timings, warm
from diskwatch.trends.norms import NORMS
from tests.analyser.lives import lived
from tests.analyser.test_traffic import FIRST, taken_in
from tests.samples import DAY, NOON, read
from tests.trends.traffic import invented_days


def test_latency_is_told_by_direction_with_its_threshold_and_its_share():
    state, _, _ = taken_in(invented_days(4, 60, first_day=FIRST))
    reads, writes = timings(state)
    assert (reads.signal, writes.signal) == ("read-latency", "write-latency")
    assert reads.alarms_at == pytest.approx(3652.5 / 0.12)
    assert writes.alarms_at == pytest.approx(3652.5 / 0.05)
    assert reads.now == state.latency["read-latency"]


def test_a_drive_without_traffic_or_temperature_has_neither():
    state = lived(read(NOON, crc_errors=0))[-1].state
    assert timings(state) == ()
    assert warm(state) is None


def test_temperature_is_told_while_it_is_learnt_and_after():
    young = warm(lived(*(read(NOON + day * DAY, temperature=35) for day in range(9)))[-1].state)
    assert young is not None
    assert (young.usual, young.learnt_days, young.days) == (None, 8, None)
    old = warm(lived(*(read(NOON + day * DAY, temperature=35) for day in range(40)))[-1].state)
    assert old is not None
    assert old.usual == 35
    assert old.days is not None


def test_all_ledgers_together_are_their_mean_by_share():
    state, _, _ = taken_in(invented_days(3, 110, slower_from=90, first_day=FIRST))
    last = (FIRST + 120) * DAY
    state = analyser.advance(state, read(last, crc_errors=0)).state
    state = analyser.advance(state, read(last + DAY, crc_errors=3)).state
    link = next(norm for norm in NORMS if norm.stream == "link")
    assert joint(state) == pytest.approx(
        link.share * state.streams["link"].ledger.evidence
        + 0.12 * (state.latency["read-latency"].evidence or 0)
        + 0.05 * (state.latency["write-latency"].evidence or 0)
    )


def test_a_quiet_ledger_alone_is_weighed_by_its_share():
    state = lived(*(read(NOON + day * DAY, crc_errors=0) for day in range(400)))[-1].state
    assert 0 < joint(state) < 0.10 * 400
