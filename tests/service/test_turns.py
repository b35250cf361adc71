from dataclasses import replace

import pytest

from diskwatch.records import Outcome
from diskwatch.service.pace import Why
from diskwatch.service.turns import Turns
from tests.samples import HDD, NOON, SSD
from tests.service.machines import counted, found

DISK = found(HDD)
HALF_HOUR = 1_800


class Running:
    """Rounds every half an hour over given counters."""

    def __init__(self, *, hung=frozenset):
        self.turns = Turns(every=HALF_HOUR, hung=hung)
        self.number = 0

    def round(self, *reads, drive=DISK, key="disk 1", outcome=Outcome.READ, everyone=False, own=0):
        totals = {"sda": counted(reads[0])} if reads else {}
        at = NOON + self.number * HALF_HOUR
        self.number += 1
        (why,) = self.turns.plan({key: drive}, totals, at=at, everyone=everyone).values()
        if why.ask or why is Why.ASLEEP:
            after = {"sda": counted(reads[0] + own)} if reads else {}
            self.turns.answered(key, outcome, after)
        return why


def test_a_drive_that_completed_nothing_since_it_was_asked_is_left_out():
    running = Running()
    assert [running.round(5) for _ in range(4)] == [Why.FIRST, Why.IDLE, Why.DUE, Why.IDLE]
    assert running.round(6) is Why.DUE


def test_what_a_question_itself_moved_is_no_work():
    running = Running()
    assert running.round(5, own=6) is Why.FIRST
    assert [running.round(11, own=6) for _ in range(2)] == [Why.IDLE, Why.DUE]
    assert [running.round(17, own=6) for _ in range(3)] == [Why.IDLE] * 3


def test_a_drive_whose_counters_are_gone_when_it_answers_keeps_those_of_the_beginning():
    turns = Turns(every=HALF_HOUR)
    for at, why in ((NOON, Why.FIRST), (NOON + HALF_HOUR, Why.IDLE)):
        assert turns.plan({"k": DISK}, {"sda": counted(5)}, at=at) == {"k": why}
        turns.answered("k", Outcome.ABSENT, {})


def test_work_in_a_round_that_left_it_out_still_counts_as_work():
    running = Running()
    assert [running.round(5), running.round(5), running.round(6), running.round(6)] == [
        Why.FIRST,
        Why.IDLE,
        Why.DUE,
        Why.IDLE,
    ]


def test_a_drive_without_counters_is_asked_in_every_round():
    running = Running()
    assert [running.round(), running.round(), running.round()] == [Why.FIRST, Why.DUE, Why.DUE]
    behind = replace(DISK, blocks=())
    assert [running.round(5, drive=behind, key="bus 7") for _ in range(3)] == [Why.FIRST, Why.DUE, Why.DUE]


def test_another_device_under_the_name_is_asked_at_once():
    running = Running()
    running.round(5)
    assert running.round(5, key="disk 2") is Why.FIRST
    assert running.round(5, key="disk 1") is Why.FIRST  # it was away meanwhile


def test_a_drive_that_wakes_up_is_asked_as_if_new():
    running = Running()
    asleep = replace(DISK, asleep=True)
    assert [running.round(5, drive=asleep, outcome=Outcome.ASLEEP) for _ in range(2)] == [Why.ASLEEP] * 2
    assert running.round(6) is Why.FIRST


def test_time_outs_are_remembered_over_rounds():
    running = Running()
    whys = [running.round(number, outcome=Outcome.TIMED_OUT) for number in range(7)]
    assert whys == [Why.FIRST, Why.SILENT, Why.DUE, Why.SILENT, Why.SILENT, Why.SILENT, Why.DUE]


def test_a_drive_whose_requests_do_not_move_is_left_out_as_long_as_they_do_not():
    hung = {"sda"}
    running = Running(hung=lambda: frozenset(hung))
    assert [running.round(5), running.round(6)] == [Why.FIRST, Why.HUNG]
    hung.clear()
    assert running.round(7) is Why.DUE


def test_whoever_wants_everyone_asked_gets_the_idle_too():
    running = Running()
    assert [running.round(5), running.round(5, everyone=True)] == [Why.FIRST, Why.WANTED]


def test_what_is_forgotten_is_asked_as_if_new():
    running = Running()
    running.round(5)
    running.turns.forget()
    assert running.round(5) is Why.FIRST


def test_an_answer_to_a_question_that_was_not_planned_is_none():
    turns = Turns(every=HALF_HOUR)
    turns.answered("disk 1", Outcome.TIMED_OUT, {})
    assert turns.plan({"disk 1": DISK}, {}, at=NOON) == {"disk 1": Why.FIRST}


@pytest.mark.parametrize("missing", [{}, {"sda": counted(5)}])
def test_a_drive_of_several_devices_has_worked_or_not_only_where_all_are_known(missing):
    two = replace(found(SSD, device="/dev/sda"), blocks=("sda", "sdb"))
    turns = Turns(every=HALF_HOUR)
    for number in range(3):
        (why,) = turns.plan({"k": two}, missing, at=NOON + number * HALF_HOUR).values()
        turns.answered("k", Outcome.READ, missing)
        assert why.ask
