from functools import partial

import pytest

from diskwatch import analyser
from diskwatch.cli import measured
from diskwatch.history.forecasts import Kept
from diskwatch.records import Forecast
from diskwatch.service.keeper import Keeper
from diskwatch.service.rounds import Rounds
from tests.analyser.test_forecasts import writing
from tests.analyser.test_traffic import FIRST, taken_in
from tests.cli.run import run
from tests.samples import DAY, HDD, NOON, read
from tests.service.machines import ScriptedMachine, found
from tests.service.test_latency import night, spans
from tests.trends.probes import seeded
from tests.trends.test_probed import a_day
from tests.trends.traffic import invented_days


@pytest.fixture
def slowed(tmp_path):
    """A state folder with a drive whose reads became slower."""
    keeper = Keeper(tmp_path)
    machine = ScriptedMachine(found(HDD))
    days = invented_days(3, 110, slower_from=90, first_day=FIRST)
    for number in range(-1, 112, 7):
        if number > 0:
            keeper.add_traffic(list(spans(days[number - 7 : number])))
        at = night(FIRST + number)
        machine.answers = {"/dev/sda": [read(at, crc_errors=0, temperature=35)]}
        Rounds(machine, keeper, partial(int, at)).run()
    keeper.close()
    return tmp_path


def test_why_lays_open_latency_temperature_forecasts_and_the_bound(slowed):
    told = run("why", "INV0001", "--state", slowed)
    assert told.code == 0
    text = " ".join(told.out.split())
    assert "Latency at equal load: Reads take 2" in text
    assert "Temperature: What is usual is still being learnt" in text
    assert "Forecasts: Reads taking twice as long as usual (against its own past): " in text
    assert "Proved, for counters" in text
    assert "Assumed, for latency and temperature" in text
    assert "one kind of work only" in text
    assert max(map(len, told.out.splitlines())) <= 80


def test_the_json_has_the_same_as_numbers(slowed):
    answer = run("why", "INV0001", "--json", "--state", slowed).json
    reads = answer["latency"][0]
    assert reads["signal"] == "read-latency"
    assert reads["evidence"] > reads["alarms_at"] == pytest.approx(3652.5 / 0.12)
    assert reads["times_as_long"] == pytest.approx(
        reads["now_microseconds"] / reads["usual_microseconds"], rel=0.01
    )
    assert answer["joint_evidence"] >= 0.12 * reads["evidence"]
    assert answer["temperature"]["usual_celsius"] is None
    assert answer["probe"] is None
    assert answer["files"] == []
    assert [one["signal"] for one in answer["forecasts"]][:1] == ["read-latency"]
    assert answer["drive"]["signals"]["read-latency"]["unit"] == "microseconds"
    assert any(line.startswith("Proved") for line in answer["bound"])


def test_a_drive_of_which_nothing_is_known_has_no_bound_to_explain():
    why = analyser.explain(analyser.start())
    assert list(measured.bound(why)) == list(measured.latency(why)) == list(measured.temperature(why)) == []


def test_a_drive_that_only_counts_hears_nothing_of_latency():
    state = analyser.advance(analyser.start(), read(NOON, crc_errors=0)).state
    told = " ".join(measured.bound(analyser.explain(state)))
    assert "Proved" in told
    assert "latency" not in told


def test_how_earlier_forecasts_fared_is_told_and_numbered():
    made = Forecast(
        signal="percentage-used",
        limit=100,
        made_on_day=NOON // DAY,
        low=9,
        high=30,
        probability=0.8,
        reason=None,
    )
    kept = (Kept(forecast=made, reached=NOON // DAY + 20),)
    at = NOON + 40 * DAY
    assert list(measured.forecasts((), kept, at)) == ["Of 1 earlier forecasts whose time is over, 1 came true."]
    why = analyser.explain(analyser.start())
    assert "'held': True" in str(measured.answer(why, kept, at)["forecasts"])


def test_every_forecast_that_the_analyser_makes_has_words():
    passes = writing(60, available_spare=100)
    state = analyser.start()
    for one in passes:
        state = analyser.advance(state, one).state
    told = list(measured.forecasts(analyser.forecasts(state, passes[-1].at), (), passes[-1].at))
    assert len(told) == 2
    assert told[0].startswith("Rated endurance")


def test_even_traffic_is_told_within_its_norm():
    state, _, _ = taken_in(invented_days(4, 120, first_day=FIRST))
    told = list(measured.latency(analyser.explain(state)))
    assert "once a year or more often" in told[0]


@pytest.fixture
def probed(tmp_path):
    """A state folder with a disk that has to read ever more again."""
    keeper, chance = Keeper(tmp_path), seeded(1)
    machine = ScriptedMachine(found(HDD))
    for number in range(25):
        at = FIRST * DAY + number * DAY + 3600
        machine.answers = {"/dev/sda": [read(at, crc_errors=0)]}
        day = a_day(chance, FIRST + number, retried=0.03 if number > 16 else 0.0003)
        Rounds(machine, keeper, partial(int, at), probed={1: day}.pop).run()
    keeper.close()
    return tmp_path


def test_why_tells_what_probes_have_come_to_and_what_their_bound_rests_on(probed):
    told = run("why", "INV0001", "--state", probed)
    text = " ".join(told.out.split())
    assert "Probe: timed reads while nothing else goes on: Late reads: " in text
    assert "Speed without load: " in text
    assert "Assumed, for the probe" in text
    assert max(map(len, told.out.splitlines())) <= 80


def test_the_json_has_the_probe_too(probed):
    answer = run("why", "INV0001", "--json", "--state", probed).json
    probe = answer["probe"]
    assert probe["probes"] == 25
    assert probe["late_evidence"] > probe["late_alarms_at"] == pytest.approx(3652.5 / 0.12)
    assert probe["late_reads"] > 10
    assert answer["drive"]["signals"]["late-reads"]["evidence"] == probe["late_evidence"]
