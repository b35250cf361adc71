from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.history.reader import Past
from diskwatch.records import CallWord, DriveRound, IoSpan, Learnt, LimitSource, Outcome, Round
from diskwatch.service.keeper import Keeper
from diskwatch.service.latency import BITE, OVER, Latency, circumstances
from diskwatch.service.rounds import Rounds
from tests.samples import DAY, HDD, HERE, NOON, missed, read
from tests.service.machines import ScriptedMachine, found
from tests.trends.traffic import invented_days

FIRST = NOON // DAY


def spans(days):
    """Roll-ups as the traffic that they are made of."""
    for rollups in days:
        for one in rollups:
            counts = replace(one.counts, busy_ms=one.counts.read_ms)
            yield IoSpan(drive=1, at=one.at, seconds=float(one.wall_seconds), counts=counts)


class Watched:
    """A drive that works and is asked once a day, an hour and a bit after midnight."""

    def __init__(self, folder):
        self.keeper = Keeper(folder)
        known = self.keeper.known
        self.known = known[0] if known else self.keeper.admit(HDD, HERE, NOON)
        self.latency = Latency(self.keeper)
        kept = self.keeper.state(1)
        self.state = analyser.start() if kept is None else analyser.load(kept)
        self.happened = []
        if kept is None:
            self.ask(FIRST * DAY)

    def work(self, days):
        self.keeper.add_traffic(list(spans(days)))

    def ask(self, at):
        taken = self.latency.take_in(self.known, self.state, at)
        pass_ = read(at, crc_errors=0)
        step = analyser.advance(taken.state, pass_)
        self.state = step.state
        self.happened += taken.happened
        part = DriveRound(
            known=self.known,
            pass_=pass_,
            state=analyser.dump(step.state),
            learnt=taken.learnt,
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        self.keeper.record(Round(at=at, drives=(part,)))
        return taken

    def end(self):
        self.keeper.close()


def night(day):
    return (day + 1) * DAY + OVER + 60


DAYS = invented_days(3, 40, first_day=FIRST)


def test_a_day_is_taken_in_once_an_hour_after_it_is_over(tmp_path):
    watched = Watched(tmp_path)
    watched.work(DAYS[:2])
    assert watched.ask(FIRST * DAY + DAY + 60).learnt is None
    taken = watched.ask(night(FIRST))
    assert taken.learnt is not None
    assert taken.learnt.through == FIRST
    assert watched.ask(night(FIRST) + 1800).learnt is None
    assert watched.ask(night(FIRST + 1)).learnt.through == FIRST + 1
    watched.end()


@pytest.mark.parametrize("restarts", [1, 7])
def test_restarts_neither_lose_nor_double_a_day(tmp_path, restarts):
    whole, broken = Watched(tmp_path / "whole"), Watched(tmp_path / "broken")
    for number, rollups in enumerate(DAYS):
        for watched in (whole, broken):
            watched.work([rollups])
            watched.ask(night(FIRST + number))
        if number % restarts == 0:
            broken.end()
            broken = Watched(tmp_path / "broken")
    assert analyser.dump(broken.state) == analyser.dump(whole.state)
    assert broken.keeper.ask(lambda history: history.learnt(1)) == whole.keeper.ask(
        lambda history: history.learnt(1)
    )
    whole.end()
    broken.end()


def test_it_is_the_same_as_the_roll_ups_themselves_lead_to(tmp_path):
    watched = Watched(tmp_path)
    watched.work(DAYS)
    for number in range(10):
        watched.ask(night(FIRST + 40) + number * 1800)
    state, latency = analyser.start(), analyser.no_latency()
    for rollups in DAYS:
        if rollups:
            day = (rollups[0].at - 300) // DAY
            step = analyser.take_in_traffic(state, latency, rollups, day=day, at=NOON, key="x")
            state, latency = step.state, step.latency
    assert watched.state.latency == state.latency
    watched.end()


def test_a_long_stop_is_caught_up_with_by_bites(tmp_path):
    watched = Watched(tmp_path)
    watched.work(DAYS)
    through = [
        taken.learnt.through - FIRST
        for number in range(20)
        if (taken := watched.ask(night(FIRST + 40) + number * 1800)).learnt is not None
    ]
    worked = [day for day, rollups in enumerate(DAYS) if rollups]
    assert through == [*worked[BITE - 1 :: BITE], *([worked[-1]] if len(worked) % BITE else [])]
    watched.end()


def test_while_the_last_day_waits_to_be_written_none_is_taken_in(tmp_path, monkeypatch):
    watched = Watched(tmp_path)
    watched.work(DAYS[:3])
    monkeypatch.setattr(type(watched.keeper), "waiting", property(lambda _: 1))
    assert watched.ask(night(FIRST + 2)).learnt is None
    monkeypatch.undo()
    assert watched.ask(night(FIRST + 2)).learnt is not None
    watched.end()


def test_a_clock_that_was_a_year_ahead_does_not_silence_it(tmp_path):
    watched = Watched(tmp_path)
    watched.work([[replace(one, at=one.at + 400 * DAY) for one in DAYS[0]]])
    assert watched.ask(night(FIRST + 400)).learnt.through == FIRST + 400
    watched.work(DAYS[:3])
    assert watched.ask(night(FIRST)).learnt.through == FIRST
    assert watched.ask(night(FIRST + 1)).learnt.through == FIRST + 1
    watched.end()


def test_what_was_learnt_and_is_damaged_is_learnt_anew_and_told(tmp_path):
    watched = Watched(tmp_path)
    watched.work(DAYS[:1])
    pass_ = missed(NOON, Outcome.ASLEEP)
    part = DriveRound(
        known=watched.known, pass_=pass_, state=None, learnt=Learnt(through=FIRST - 5, state="[]")
    )
    watched.keeper.record(Round(at=NOON, drives=(part,)))
    taken = watched.ask(night(FIRST))
    assert [entry.kind for entry in taken.happened] == ["trouble"]
    assert taken.learnt.through == FIRST
    watched.end()


def test_another_port_or_firmware_is_another_circumstance(tmp_path):
    watched = Watched(tmp_path)
    known = watched.known
    port = replace(known, place=replace(known.place, bay="pci-7"))
    firmware = replace(known, drive=replace(known.drive, firmware="X2"))
    assert len({circumstances(known), circumstances(port), circumstances(firmware)}) == 3
    watched.end()


@pytest.mark.parametrize("refused", [False, True])
def test_slower_work_reaches_the_list_of_drives_also_where_no_reading_may_be_asked(tmp_path, refused):
    days = invented_days(3, 110, slower_from=90, first_day=FIRST)
    keeper = Keeper(tmp_path)
    machine = ScriptedMachine(found(HDD))

    def asked(at):
        answer = missed(at, Outcome.REFUSED) if refused else read(at, crc_errors=0)
        machine.answers = {"/dev/sda": [answer]}
        return Rounds(machine, keeper, lambda: at).run()

    asked(FIRST * DAY)
    for number in range(0, 112, 4):
        keeper.add_traffic(list(spans(days[number : number + 4])))
        asked(night(FIRST + number + 3))
    with Past.open(tmp_path) as past:
        ((line,), book) = past.bays(NOON).drives, past.day_book()
        evidence = past.evidence(1, "read-latency")
        forecasts = {one.signal: one for one in past.forecasts(1)}
    assert line.call is not None
    assert (line.call.word, line.call.rule.split(":")[0]) == (CallWord.LOOK, "drift")
    shown = {one.name: one for one in line.signals}
    assert shown["read-latency"].value in range(8_000, 11_000)
    assert shown["read-latency"].unit == "microseconds"
    assert shown["read-latency"].evidence == evidence[-1][1]
    assert shown["read-latency"].evidence > 30_437
    assert {"drift", "call"} <= {entry.kind for entry in book}
    assert forecasts["read-latency"].limit_from is LimitSource.OWN
    assert line.forecasts == tuple(forecasts[name] for name in sorted(forecasts))
    keeper.close()
