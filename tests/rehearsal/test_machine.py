import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.records import Outcome, SignalKind
from diskwatch.rehearsal.happenings import BlocksFail, Busy, CableLoosens, FirmwareUpdate, Scratch, StripFails
from diskwatch.rehearsal.scenario import BaySpec, Holiday
from diskwatch.trends.norms import MAY_FALL
from tests.rehearsal.examples import HDD, NVME, hdd, live, machine, nvme, ssd


def test_the_survey_lists_each_drive_where_it_is_and_ask_brings_its_reading():
    one = machine()
    live(one, 0.2)
    found = one.survey().found
    assert [(each.place.device, each.blocks) for each in found] == [
        ("/dev/sda", ("sda",)),
        ("/dev/nvme0", ("nvme0n1",)),
    ]
    for each in found:
        answer = one.ask(each)
        assert answer.outcome is Outcome.READ
        assert answer.at == one.clock.now()
        assert answer.reading is not None
        assert answer.reading.number("power-on-hours") is not None


def test_a_sleeping_drive_is_not_asked_and_an_absent_one_says_so():
    one = machine(hdd(sleeps=True, load=0.0))
    live(one, 0.2)
    (found,) = one.survey().found
    assert found.asleep
    assert one.ask(found).outcome is Outcome.ASLEEP
    one.take_away(HDD, 0)
    assert one.ask(found).outcome is Outcome.ABSENT


def test_a_drive_that_joins_later_is_not_there_before():
    one = machine(hdd(joins_day=2), nvme())
    live(one, 1.9)
    assert len(one.survey().found) == 1
    live(one, 2.1)
    assert len(one.survey().found) == 2


def test_two_devices_are_never_one_instance_nor_one_device_after_a_start():
    one = machine(hdd(), nvme(), ssd())
    live(one, 0.2)
    before = {name: each.instance for name, each in one.counts().items()}
    assert [found.instance for found in one.survey().found] == list(before.values())
    assert len(set(before.values())) == 3
    one.drives[HDD].power_up()
    after = {name: each.instance for name, each in one.counts().items()}
    assert [name for name in before if before[name] != after[name]] == ["sda"]


def test_a_strip_that_fails_hits_all_of_its_drives_at_once_and_no_other():
    bays = (BaySpec(name="one", strip="desk"), BaySpec(name="two", strip="desk"))
    one = machine(hdd(), nvme(), ssd(), bay=bays, event=(StripFails(day=0, strip="desk", losses_a_year=400),))
    one.strips["wall"].losses_a_year = 0.0
    live(one, 20)
    lost = [drive.unsafe for drive in one.drives.values()]
    assert lost[0] == lost[1] > 5
    assert lost[2] == 0


def until_power_fails(one):
    """Live until a power loss has hit the first drive; the instances of all before it."""
    first = next(iter(one.drives.values()))
    before, unsafe = {}, first.unsafe
    while first.unsafe == unsafe:
        before = {name: each.instance for name, each in one.counts().items()}
        one.live()
    return before


def test_where_the_machine_itself_loses_power_all_of_it_starts_anew():
    bays = (BaySpec(name="one", strip="desk"), BaySpec(name="two", strip="desk"))
    fails = StripFails(day=0.5, strip="desk", losses_a_year=100)
    one = machine(hdd(), nvme(), ssd(), bay=bays, strip="desk", event=(fails,))
    one.strips["wall"].losses_a_year = 0.0
    live(one, 0.4)
    assert one.clock.steady() == pytest.approx(0.4 * 86_400, abs=3_600)
    before = until_power_fails(one)
    assert one.boots == 2
    assert one.clock.steady() == 0.0
    after = one.counts()
    assert not [name for name in before if after[name].instance == before[name]]
    # What the kernel counted since is the work of one hour at most, whatever stood there before.
    assert all(each.counts.busy_ms <= 3_600_000 for each in after.values())
    cycles = [drive.cycles for drive in one.drives.values()]
    assert cycles[0] == cycles[1] > cycles[2], "the third drive hangs on the wall and kept its power"


def test_drives_on_a_strip_of_their_own_come_back_anew_while_the_machine_runs_on():
    fails = StripFails(day=0, strip="desk", losses_a_year=100)
    one = machine(hdd(), nvme(), bay=(BaySpec(name="one", strip="desk"),), event=(fails,))
    one.strips["wall"].losses_a_year = 0.0
    live(one, 0.1)
    before = until_power_fails(one)
    assert one.boots == 1
    assert one.clock.steady() > 0
    after = one.counts()
    assert [name for name in before if after[name].instance != before[name]] == ["sda"]


def test_an_office_machine_counts_starts_and_no_hours_at_night():
    one = machine(habit="office", holiday=(Holiday(day=20, days=7),))
    live(one, 28)
    told = one.drives[HDD].told()
    working_days = 15  # 2025-01-01 to 2025-01-20, then a week away, then Tuesday the 28th
    assert working_days - 2 <= told.cycles - 1 <= working_days + 1
    assert (told.hours - 1000) / (told.cycles - 1) <= 12


def test_a_busy_week_is_busy_and_then_over():
    one = machine(event=(Busy(day=7, days=7, factor=6.0),))
    moved = []
    for day in (7, 14, 21):
        before = one.drives[NVME].read_commands + one.drives[NVME].write_commands
        live(one, day)
        moved.append(one.drives[NVME].read_commands + one.drives[NVME].write_commands - before)
    assert moved[1] > 2.5 * max(moved[0], moved[2])


def test_each_drives_life_is_its_own_whatever_drives_stand_beside_it():
    alone, together = machine(hdd()), machine(hdd(), nvme(), ssd())
    for each in (alone, together):
        live(each, 5)
    assert alone.drives[HDD].told() == together.drives[HDD].told()


@settings(max_examples=8)
@given(st.integers(0, 10_000))
def test_the_same_seed_gives_the_same_life(seed):
    lives = []
    for _ in range(2):
        one = machine(hdd(), nvme(), seed=seed)
        live(one, 3)
        lives.append(([drive.told() for drive in one.drives.values()], dict(one.counts())))
    assert lives[0] == lives[1]


@settings(max_examples=8)
@given(st.integers(0, 10_000), st.floats(1, 4))
def test_counters_as_read_never_fall_but_where_the_scenario_resets_them(seed, day):
    reset = FirmwareUpdate(day=day, drive=HDD, firmware="I2", resets=True)
    loose = CableLoosens(day=0, bay="one", bad_days=1.0, burst=9.0, hangs=0.3)
    harm = Scratch(day=1, drive=HDD, units=30, growth=0.2)
    one = machine(
        hdd(), nvme(), seed=seed, event=(loose, harm, reset, BlocksFail(day=0, drive=NVME, a_year=900))
    )
    before: dict[tuple[str, str], int] = {}
    fell: set[tuple[str, float]] = set()
    while one.clock.days() < 5:
        one.live()
        for found in one.survey().found:
            reading = one.ask(found).reading
            assert reading is not None
            for value in reading.values:
                key = (found.place.device, value.signal)
                if value.kind in {SignalKind.COUNT, SignalKind.TIME} and isinstance(value.value, int):
                    if value.value < before.get(key, 0) and value.signal not in MAY_FALL:
                        fell.add((value.signal, one.clock.days()))
                    before[key] = value.value
    assert {signal for signal, _ in fell} <= {"crc-errors", "command-timeouts"}
    assert all(day <= when < day + 1 / 24 + 1e-9 for _, when in fell)
    assert before["/dev/nvme0", "power-on-hours"] == 120


def test_utilisation_and_requests_under_way_agree_with_rate_times_time():
    # Little's law and the utilisation law on the counters of one span: L = l W, U = l S <= L.
    one = machine(hdd(load=4.0))
    live(one, 1)
    before = one.counts()["sda"].counts
    live(one, 1.5)
    after = one.counts()["sda"].counts
    span = 43_200_000
    count = after.reads + after.writes - before.reads - before.writes
    total = after.read_ms + after.write_ms - before.read_ms - before.write_ms
    busy = after.busy_ms - before.busy_ms
    under_way, used = total / span, busy / span
    assert count > 1_000
    assert 0 < used < 1
    # With one request served at a time, those under way are the one in service and those that wait.
    assert used <= under_way + 1e-6
    assert under_way <= used + used**2 / (1 - used) * 3 + 0.05


@pytest.mark.parametrize("as_text", [False, True])
def test_what_a_drive_prints_is_handed_on_word_for_word_once_a_day(as_text):
    one = machine(hdd(as_text=as_text))
    answers = []
    for days in (0.2, 0.4, 1.2):
        live(one, days)
        answers.append(one.ask(one.survey().found[0]).answer)
    assert answers[1] is None
    for answer in (answers[0], answers[2]):
        assert answer is not None
        assert HDD in answer
