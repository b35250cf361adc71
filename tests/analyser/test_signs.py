import pytest

from diskwatch.records import CallWord, Cause, Failing, Outcome
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, NOON, NVME, SSD, attribute, missed, read


def test_crc_errors_beyond_their_norm_and_quiet_media_are_the_link():
    steps = lived(*(read(NOON + day * DAY, crc_errors=day // 10, pending_sectors=0) for day in range(120)))
    call = steps[-1].call
    assert call.cause is Cause.LINK
    assert call.cause_probability >= 0.7
    assert call.cause_second is None


def test_a_first_bad_sector_alone_names_the_medium_with_a_runner_up():
    call = lived(
        read(NOON, pending_sectors=0, crc_errors=0), read(NOON + DAY, pending_sectors=8, crc_errors=0)
    )[-1].call
    assert (call.cause, call.cause_second) == (Cause.MEDIA, Cause.HEAD)
    assert 0.35 <= call.cause_probability < 0.7


def test_bad_sectors_and_reads_given_up_make_it_surer_that_it_is_the_medium():
    def probability(given_up):
        before = read(NOON, pending_sectors=0, reported_uncorrectable=0, crc_errors=0)
        after = read(NOON + DAY, pending_sectors=8, reported_uncorrectable=given_up, crc_errors=0)
        return lived(before, after)[-1].call.cause_probability

    assert probability(2) > probability(0)


def test_one_crc_error_within_its_norm_is_no_sign():
    """Beside a bad sector it would speak for the link; within two a year it says nothing."""
    calm = read(NOON, pending_sectors=0, crc_errors=0)
    with_one = lived(calm, read(NOON + DAY, pending_sectors=8, crc_errors=1))[-1].call
    without = lived(calm, read(NOON + DAY, pending_sectors=8, crc_errors=0))[-1].call
    assert with_one.cause is without.cause


@pytest.mark.parametrize(
    ("signals", "cause"),
    [
        ({"temperature": 85, "warning_celsius": 80}, Cause.HEAT),
        ({"available_spare": 3, "spare_threshold": 10}, Cause.SPARE),
        ({"self_assessment": "failed", "critical_warning": 8}, Cause.WEAR_OUT),
    ],
)
def test_a_fact_that_tells_its_cause_is_not_put_to_the_table(signals, cause):
    (step,) = lived(read(NOON, NVME, media_errors=0, **signals))
    assert (step.call.cause, step.call.cause_probability) == (cause, None)


def test_a_failing_attribute_is_a_sign_on_the_first_reading_too():
    (step,) = lived(read(NOON, crc_errors=0, attributes=(attribute(5, failing=Failing.NOW),)))
    assert step.call.word is CallWord.RETIRE
    assert step.call.cause is Cause.MEDIA


def test_the_cause_stands_while_the_drive_is_not_read():
    steps = lived(
        read(NOON, pending_sectors=0),
        read(NOON + DAY, pending_sectors=8),
        missed(NOON + DAY + 60, Outcome.ASLEEP),
    )
    assert steps[-1].call == steps[-2].call


def test_that_no_read_was_given_up_counts_once_where_no_sector_waits_either():
    drift = lived(
        *(
            read(NOON + day * DAY, crc_errors=day // 10, pending_sectors=0, reported_uncorrectable=0)
            for day in range(60)
        )
    )[-1]
    assert drift.state.signs["media counter"] is False
    assert "uncorrectable event" not in drift.state.signs


def test_commands_that_hung_while_transfers_were_damaged_stay_with_the_link_once_its_cable_was_changed():
    def counted(day):
        times = min(day, 60) // 10
        return read(NOON + day * DAY, crc_errors=25 * times, command_timeouts=times, pending_sectors=0)

    steps = lived(*map(counted, range(160)))
    last = steps[-1]
    assert "drift:link" not in last.state.standing, "it was quiet for long enough to be taken for mended"
    assert last.call.rule == "drift:timeouts"
    causes = {step.call.cause for step in steps if step.call.word is not CallWord.KEEP}
    assert causes == {Cause.LINK}


def test_a_link_stays_the_cause_while_a_machine_that_is_off_lets_its_signs_lapse():
    loose = [read(NOON + day * DAY, crc_errors=25 * (day // 10), power_on_hours=24 * day) for day in range(61)]
    resting = read(NOON + 200 * DAY, crc_errors=150, power_on_hours=24 * 60 + 5)
    last = lived(*loose, resting)[-1]
    assert (last.call.rule, last.call.cause) == ("drift:link", Cause.LINK)


def test_another_sign_after_the_first_have_lapsed_is_judged_anew():
    def counted(day):
        times, bad = min(day, 60) // 10, 8 if day > 120 else 0
        return read(NOON + day * DAY, crc_errors=25 * times, command_timeouts=times, pending_sectors=bad)

    steps = lived(*map(counted, range(130)))
    assert (steps[119].call.cause, steps[-1].call.cause) == (Cause.LINK, Cause.MEDIA)


@pytest.mark.parametrize(
    ("drive", "built"),
    [(HDD, {"turning platters"}), (SSD, {"no platters"}), (NVME, {"no platters", "no cable"})],
)
def test_what_a_drive_is_built_like_is_a_sign_as_far_as_it_is_known(drive, built):
    steps = lived(*(read(NOON + day * DAY, drive, crc_errors=day // 10) for day in range(60)))
    assert {
        one for one in steps[-1].state.signs if one in {"turning platters", "no platters", "no cable"}
    } == built
