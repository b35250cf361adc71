from diskwatch import analyser
from diskwatch.analyser.around import Around
from diskwatch.records import CallWord, Cause, Outcome
from tests.samples import DAY, HDD, NOON, NVME, SSD, missed, read, with_serial

LINK = "pci-0000:00:17.0-ata-1"


def together(days, *passes, bays=("one", "two", "three")):
    """Drives of one machine judged day by day as a round judges them; the last step of each."""
    states = [analyser.start() for _ in passes]
    steps = {}
    for day in range(days):
        for number, one in enumerate(passes):
            pass_ = one(day)
            others = tuple(state for other, state in enumerate(states) if other != number)
            steps[number] = analyser.advance(states[number], pass_, Around(bay=bays[number], others=others))
            states[number] = steps[number].state
    return steps


def power(day):
    """Power that goes away every third day."""
    return read(NOON + day * DAY, SSD, unsafe_power_offs=day // 3, media_errors=0, crc_errors=0)


def heads(day):
    return read(NOON + day * DAY, HDD, power_off_retracts=40 + day // 3, pending_sectors=0, crc_errors=0)


def test_power_that_several_drives_lose_on_the_same_days_is_named_with_greater_weight():
    alone = together(120, power)[0]
    second = with_serial(SSD, "INV0099", "/dev/sdz")
    both = together(
        120,
        power,
        lambda day: read(NOON + day * DAY, second, unsafe_power_offs=day // 3, media_errors=0, crc_errors=0),
    )[0]
    assert (alone.call.cause, both.call.cause) == (Cause.POWER, Cause.POWER)
    assert both.call.cause_probability > alone.call.cause_probability


def test_heads_that_retract_whenever_a_neighbour_loses_power_want_a_look_at_the_power():
    hdd = together(120, power, heads)[1]
    assert (hdd.call.word, hdd.call.rule, hdd.call.cause) == (CallWord.LOOK, "fact:power-shared", Cause.POWER)
    assert "1 other drive" in hdd.call.reason


def test_heads_that_retract_at_every_switching_off_bear_no_witness():
    def daily(day):
        return read(NOON + day * DAY, HDD, power_off_retracts=40 + day, pending_sectors=0)

    assert together(120, power, daily)[1].call.word is CallWord.KEEP
    assert together(40, heads)[0].call.word is CallWord.KEEP


def test_trouble_that_stays_with_the_bay_after_another_drive_moved_in_points_to_cable_or_port():
    other = with_serial(HDD, "INV0098", "/dev/sdy")

    def first(day):
        return read(NOON + day * DAY, HDD, crc_errors=min(day, 39) // 8, pending_sectors=0)

    def second(day):
        return read(NOON + day * DAY, other, crc_errors=max(0, day - 40) // 8, pending_sectors=0)

    states = [analyser.start(), analyser.start()]
    plain = analyser.start()
    for day in range(90):
        bays = ("one", "spare") if day < 40 else ("elsewhere", "one")
        for number, one in enumerate((first, second)):
            around = Around(bay=bays[number], others=(states[1 - number],))
            states[number] = analyser.advance(states[number], one(day), around).state
        plain = analyser.advance(plain, second(day)).state
    call = states[1].call
    assert call is not None
    assert plain.call is not None
    assert call.cause is Cause.LINK
    assert (call.cause_probability or 0) > (plain.call.cause_probability or 1)
    assert states[0].bays.keys() == {"one"}


def absences(*days):
    """An NVMe drive that is not there on some days."""

    def one(day):
        at = NOON + day * DAY
        return (
            missed(at, Outcome.ABSENT, NVME)
            if day in days
            else read(at, NVME, media_errors=0, unsafe_power_offs=3)
        )

    return one


def test_an_nvme_drive_that_comes_and_goes_points_to_its_controller():
    step = together(24, absences(10, 11, 12, 21, 22, 23))[0]
    assert step.call.rule == "fact:unreadable"
    assert step.call.cause is Cause.CONTROLLER
    assert step.call.cause_second is not None


def test_a_drive_that_falls_silent_for_good_is_blamed_on_nothing():
    step = together(24, absences(*range(20, 99)))[0]
    assert (step.call.word, step.call.rule) == (CallWord.LOOK, "fact:unreadable")
    assert (step.call.cause, step.call.cause_probability) == (Cause.UNCLEAR, None)


def test_a_state_with_all_that_stands_around_survives_a_restart():
    step = together(120, power, heads)[1]
    assert analyser.load(analyser.dump(step.state)) == step.state


def test_a_life_without_trouble_remembers_none():
    quiet = together(40, lambda day: read(NOON + day * DAY, pending_sectors=3, power_off_retracts=9))[0]
    assert (quiet.state.troubles, quiet.state.bays, quiet.state.showed) == ({}, {}, {})
