import pytest

from diskwatch.judge.facts import facts
from diskwatch.judge.rulebook import rule_of
from diskwatch.records import CallWord, Cause, DriveWarning, Failing, SelfTest
from tests.samples import NOON, attribute, reading


def found(first_spare: int | None = None, **signals):
    return {one.name: one for one in facts(reading(**signals), at=NOON, first_spare=first_spare)}


def test_a_reading_without_trouble_states_no_fact():
    assert found(pending_sectors=0, temperature=35, self_assessment="passed", critical_warning=0) == {}


def test_levels_are_no_facts():
    assert found(pending_sectors=40, reallocated_sectors=4000, offline_uncorrectable=7) == {}


def test_a_failed_self_assessment_retires():
    fact = found(self_assessment="failed")["fact:self-assessment"]
    assert (fact.calls, fact.evidence) == (CallWord.RETIRE, None)


@pytest.mark.parametrize(
    ("bits", "cause"),
    [(1, Cause.SPARE), (4, Cause.MEDIA), (8, Cause.WEAR_OUT), (16, Cause.CONTROLLER), (10, Cause.HEAT)],
)
def test_critical_warnings_other_than_heat_alone_retire_and_name_what_is_warned_of(bits, cause):
    """Bits by NVM Express, log 02h byte 0 (read in a header that restates the standard)."""
    fact = found(self_assessment="failed", critical_warning=bits)["fact:self-assessment"]
    assert fact.calls is CallWord.RETIRE
    assert fact.cause is cause


def test_an_nvme_drive_that_only_warns_of_its_temperature_is_hot_and_not_failing():
    facts_found = found(self_assessment="failed", critical_warning=2)
    assert list(facts_found) == ["fact:warns-of-heat"]
    assert facts_found["fact:warns-of-heat"].calls is CallWord.LOOK
    assert facts_found["fact:warns-of-heat"].cause is Cause.HEAT


def test_a_scsi_drive_that_warns_of_its_temperature_is_hot_and_not_failing():
    (fact,) = found(drive_warning="temperature", grown_defects=3).values()
    assert (fact.name, fact.calls, fact.cause) == ("fact:warns-of-heat", CallWord.LOOK, Cause.HEAT)


@pytest.mark.parametrize("warning", sorted(set(DriveWarning) - {DriveWarning.TEMPERATURE, DriveWarning.TEST}))
def test_every_other_warning_of_a_scsi_drive_wants_a_look_in_words_of_its_own(warning):
    (fact,) = found(drive_warning=warning.value).values()
    assert (fact.name, fact.calls) == (f"fact:warns-of-{warning}", CallWord.LOOK)
    assert fact.sentence.startswith("The drive warns")
    assert rule_of(fact.name).name == "fact:warns-of-"


def test_a_prediction_that_a_drive_tries_out_and_a_warning_that_nobody_knows_state_no_fact():
    assert found(drive_warning="test") == {}
    assert found(drive_warning="rain") == {}


def test_a_pre_failure_attribute_failing_now_retires_with_its_numbers_in_the_sentence():
    fact = found(attributes=(attribute(5, failing=Failing.NOW),))["fact:attribute-5"]
    assert fact.calls is CallWord.RETIRE
    assert fact.cause is Cause.MEDIA
    assert all(number in fact.sentence for number in ("41", "140", "1265"))


def test_an_old_age_attribute_failing_now_only_wants_a_look():
    fact = found(attributes=(attribute(9, failing=Failing.NOW, prefail=False),))["fact:attribute-9"]
    assert fact.calls is CallWord.LOOK


def test_a_temperature_attribute_failing_now_is_heat():
    fact = found(attributes=(attribute(190, failing=Failing.NOW, prefail=False),))["fact:hot"]
    assert fact.cause is Cause.HEAT


def test_an_attribute_that_failed_in_the_past_states_no_fact():
    assert found(attributes=(attribute(5, failing=Failing.PAST),)) == {}


def test_spare_below_its_threshold_retires_and_at_it_does_not():
    assert found(available_spare=9, spare_threshold=10)["fact:spare"].calls is CallWord.RETIRE
    assert found(available_spare=10, spare_threshold=10) == {}
    assert found(available_spare=0, spare_threshold=0) == {}


def test_endurance_used_up_wants_a_look_and_with_falling_spare_a_copy():
    assert found(percentage_used=104, available_spare=90)["fact:worn"].calls is CallWord.LOOK
    assert found(100, percentage_used=104, available_spare=90)["fact:worn-out"].calls is CallWord.COPY
    assert found(percentage_used=99, available_spare=90) == {}


def test_an_unreadable_sector_in_the_self_test_log_asks_for_a_copy_and_names_the_block():
    failed = SelfTest(
        name="Short",
        result="Completed: read failure",
        extended=False,
        passed=False,
        unreadable=True,
        lba=123456,
    )
    fact = found(self_tests=(failed,))["fact:self-test-unreadable"]
    assert fact.calls is CallWord.COPY
    assert "123,456" in fact.sentence


def test_an_extended_test_that_passed_since_takes_an_old_failure_back_and_a_short_one_does_not():
    failed = SelfTest(
        name="Short", result="Completed: read failure", extended=False, passed=False, unreadable=True
    )
    long_ok = SelfTest(name="Extended", result="Completed without error", extended=True, passed=True)
    short_ok = SelfTest(name="Short", result="Completed without error", extended=False, passed=True)
    aborted = SelfTest(name="Extended", result="Aborted by host", extended=True, passed=None)
    assert found(self_tests=(long_ok, failed)) == {}
    assert "fact:self-test-unreadable" in found(self_tests=(aborted, short_ok, failed))


def test_a_self_test_that_failed_otherwise_wants_a_look():
    failed = SelfTest(name="Extended", result="Completed: unknown failure", extended=True, passed=False)
    assert found(self_tests=(failed,))["fact:self-test-failed"].calls is CallWord.LOOK


def test_heat_is_judged_by_the_drives_own_limit_and_by_nothing_else():
    assert found(temperature=70, warning_celsius=70)["fact:hot"].cause is Cause.HEAT
    assert found(temperature=69, warning_celsius=70) == {}
    assert found(temperature=90) == {}
