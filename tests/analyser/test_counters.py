from diskwatch.records import CallWord
from diskwatch.trends import ledger
from tests.analyser.lives import kinds, lived
from tests.samples import DAY, NOON, read

MEDIA = 0.5 / 365.25


def test_more_passes_within_a_day_are_one_step_of_the_ledger():
    many = lived(
        *(read(NOON + hour * 1800, pending_sectors=0) for hour in range(20)),
        read(NOON + DAY, pending_sectors=0),
    )
    few = lived(read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=0))
    assert many[-1].evidence == few[-1].evidence


def test_a_single_crc_error_is_noted_and_calls_nothing():
    steps = lived(read(NOON, crc_errors=3), read(NOON + DAY, crc_errors=4))
    assert steps[-1].call.word is CallWord.KEEP
    assert kinds(steps[-1]) == ["rise"]


def test_a_counter_that_fell_invents_nothing_and_is_told():
    steps = lived(
        read(NOON, crc_errors=500), read(NOON + DAY, crc_errors=2), read(NOON + 2 * DAY, crc_errors=2)
    )
    assert kinds(steps[1]) == ["reset"]
    assert steps[2].happened == ()
    assert steps[2].call.word is CallWord.KEEP


def test_a_rewritten_pending_sector_is_no_reset():
    steps = lived(read(NOON, pending_sectors=8), read(NOON + DAY, pending_sectors=0))
    assert steps[-1].happened == ()


def test_a_value_that_is_not_known_is_neither_zero_nor_a_fall():
    steps = lived(
        read(NOON, pending_sectors=8),
        read(NOON + DAY, pending_sectors=None),
        read(NOON + 2 * DAY, pending_sectors=8),
    )
    assert [step.happened for step in steps] == [(), (), ()]


def test_a_gap_counts_the_hours_that_the_drive_was_powered():
    """Ten days away, 48 powered hours: the step after it covers 1 + 2 days."""
    steps = lived(
        read(NOON, pending_sectors=0, power_on_hours=1000),
        read(NOON + 11 * DAY, pending_sectors=0, power_on_hours=1048),
        read(NOON + 12 * DAY, pending_sectors=0, power_on_hours=1072),
    )
    quiet = ledger.count_factors(episode=False, exposure=1, norm_per_day=MEDIA)
    wide = ledger.count_factors(episode=False, exposure=3, norm_per_day=MEDIA)
    by_hand = ledger.after(ledger.after(ledger.empty(), quiet), wide, 3)
    assert steps[-1].evidence["pending-sectors"] == by_hand.evidence


def test_a_clock_set_back_lives_no_day_twice():
    forward = lived(read(NOON, pending_sectors=0), read(NOON + 400 * DAY, pending_sectors=0))
    back = lived(
        read(NOON + DAY, pending_sectors=0), read(NOON + 2 * DAY, pending_sectors=0), state=forward[-1].state
    )
    assert back[0].evidence == forward[-1].evidence
    stream = back[-1].state.streams["media"]
    assert stream.day == (NOON + 2 * DAY) // DAY


def test_a_keep_names_what_has_risen_within_the_norm():
    steps = lived(read(NOON, crc_errors=0), read(NOON + DAY, crc_errors=318))
    assert steps[-1].call.word is CallWord.KEEP
    assert "318 transfers damaged" in steps[-1].call.reason
    assert "within the norm so far" in steps[-1].call.reason
