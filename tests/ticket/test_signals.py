from dataclasses import replace

from diskwatch import analyser
from diskwatch.history.proof import SignalPast
from diskwatch.records import SignalKind, SignalNow
from diskwatch.ticket.signals import signals_part
from tests.samples import DAY, NOON
from tests.ticket.test_cautions import LINE

COUNT = SignalPast(
    name="crc-errors",
    unit="events",
    kind=SignalKind.COUNT,
    source="attribute 199",
    first=(NOON, 1),
    changes=((NOON, 1), (NOON + DAY, 5), (NOON + 2 * DAY, 9)),
    complete=True,
)
HEAT = SignalPast(
    name="temperature",
    unit="celsius",
    kind=SignalKind.GAUGE,
    source="attribute 194",
    first=(NOON, 30),
    changes=tuple((NOON + number * DAY, 30 + number % 3) for number in range(60)),
    complete=False,
)
NOW = tuple(
    SignalNow(name=name, value=value, unit=unit, since=NOON + 2 * DAY, evidence=evidence)
    for name, value, unit, evidence in (("crc-errors", 9, "events", 4.5), ("temperature", 41, "celsius", None))
)
STATE = replace(analyser.start(), firsts={"crc-errors": 1}, base={"crc-errors": 5})


def _told(state, before=None):
    part, left_out = signals_part(replace(LINE, signals=NOW), (COUNT, HEAT), state, before)
    assert isinstance(part.value, list)
    return {one["name"]: one for one in part.value}, left_out


def test_a_counter_tells_first_baseline_latest_and_every_change():
    told, left_out = _told(STATE)
    crc = told["crc-errors"]
    assert left_out == 0
    assert (crc["first"]["value"], crc["baseline"], crc["latest"]["value"]) == (1, 5, 9)
    assert [value for _, value in crc["changes"]] == [1, 5, 9]
    assert crc["evidence_days"] == 4.5


def test_a_gauge_is_held_against_the_middle_of_its_first_weeks_and_tells_no_changes():
    told, _ = _told(None)
    assert told["temperature"]["baseline"] == 31
    assert told["temperature"]["changes"] is None
    assert told["crc-errors"]["baseline"] is None


def test_changes_before_a_time_are_left_out_and_counted_but_for_the_first():
    told, left_out = _told(STATE, NOON + 2 * DAY)
    assert [value for _, value in told["crc-errors"]["changes"]] == [1, 9]
    assert left_out == told["crc-errors"]["changes_left_out"] == 1
