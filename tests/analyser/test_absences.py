from diskwatch import analyser
from diskwatch.records import CallWord, Cause, Outcome, Settled
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, NVME, missed, read

HOUR = 3600


def days(last, *gone, length=1):
    """A reading a day until the last one; on the days named, and as long after, it is away all day."""
    away = {day + more for day in gone for more in range(length)}
    for day in range(last + 1):
        at = NOON + day * DAY
        if day in away:
            yield from (missed(at + hour * HOUR, Outcome.ABSENT, NVME) for hour in range(4))
        else:
            yield read(at, NVME, media_errors=0, unsafe_power_offs=3)


def test_a_drive_that_was_gone_once_is_kept_when_it_is_back():
    assert lived(*days(11, 10))[-1].call.word is CallWord.KEEP


def test_a_long_absence_is_one():
    assert lived(*days(20, 10, length=5))[-1].call.word is CallWord.KEEP


def test_a_drive_that_was_gone_twice_within_a_month_asks_for_a_look_until_a_month_has_passed_without_another():
    passes = list(days(90, 10, 28))
    by_day = {step.state.last_at // DAY - NOON // DAY: step.call.word for step in lived(*passes)}
    look = [day for day, word in by_day.items() if word is CallWord.LOOK]
    assert look == [10, *range(28, 58)]


def test_each_further_absence_counts_the_month_anew():
    last = {step.state.last_at // DAY - NOON // DAY: step.call.word for step in lived(*days(100, 10, 28, 50))}
    assert last[70] is CallWord.LOOK
    assert last[79] is CallWord.LOOK
    assert last[80] is CallWord.KEEP


def test_what_it_says_leads_only_while_the_drive_is_there():
    away = lived(*days(28, 10, 28))[-1]
    assert away.call.rule == "fact:unreadable"
    back = lived(*days(29, 10, 28))[-1]
    assert back.call.rule == "fact:comes-and-goes"
    assert back.call.reason.startswith("It was gone and came back 2 times within 30 days, last 1 day ago.")
    assert back.call.cause is Cause.CONTROLLER


def test_the_owners_word_ends_it_and_the_next_absence_counts_as_the_first():
    *_, last = lived(*days(30, 10, 28))
    word = Settled(at=last.state.last_at + 60, because="it sits firmly now")
    state = analyser.settle(last.state, word).state
    assert state.call is not None
    assert state.call.word is CallWord.KEEP
    again = analyser.advance(state, read(word.at + DAY, NVME, media_errors=0, unsafe_power_offs=3))
    assert again.call is not None
    assert again.call.word is CallWord.KEEP
