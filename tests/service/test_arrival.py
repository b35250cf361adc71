import json
import random
from contextlib import contextmanager
from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.history.exchange import read, written
from diskwatch.history.moving import dated_states
from diskwatch.history.reader import Past
from diskwatch.history.readings import passes_with_readings
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.records import Drive, DriveRound, Failing, Outcome, Place, Round
from diskwatch.service.arrival import take_in
from diskwatch.service.owner import settle
from tests.samples import DAY, HDD, HERE, NOON, SSD, attribute, missed, read as read_pass
from tests.trends.probes import seeded
from tests.trends.test_probed import a_day

ELSEWHERE = Place(device="/dev/sdq", bay="pci-9")


def a_life(days, begin=NOON, seed=1, drive=HDD):
    """Invented passes of a drive that has defects now and then, sleeps, hangs, and once loses a signal."""
    noise = random.Random(seed)  # noqa: S311  # a life, not a secret
    pending, hours = 0, 1000
    for step in range(days * 4):
        at = begin + step * DAY // 4
        hours += 6
        if step % 11 == 10:
            yield missed(at, noise.choice([Outcome.ASLEEP, Outcome.TIMED_OUT]), drive)
            continue
        if noise.random() < 0.05:
            pending += noise.randrange(1, 9)
        signals = {"power_on_hours": hours, "pending_sectors": pending, "temperature": 30 + noise.randrange(9)}
        if step % 29 != 28:
            signals["crc_errors"] = step // 40
        failing = (attribute(5, failing=Failing.NOW),) if step > days * 3 else ()
        pass_ = read_pass(at, drive, **signals)
        assert pass_.reading is not None
        yield replace(pass_, reading=replace(pass_.reading, attributes=failing))


@contextmanager
def kept(folder):
    with History.open(folder) as history:
        yield history


def live(history, passes, drive: Drive = HDD, place: Place = HERE):
    """Watch a drive live through passes, as rounds do; gives the last state."""
    known = next((one for one in history.known() if one.drive.identity == drive.identity), None)
    known = known or history.admit(drive, place, NOON)
    text = history.states().get(known.number)
    state = analyser.start() if text is None else analyser.load(text)
    for pass_ in passes:
        step = analyser.advance(state, pass_)
        state = step.state
        part = DriveRound(
            known=known,
            pass_=pass_,
            state=analyser.dump(state),
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        happened = tuple(replace(entry, drive=known.number) for entry in step.happened)
        history.record(Round(at=pass_.at, drives=(part,), entries=happened))
    return analyser.dump(state)


def exported(folder, form="json", number=1):
    with Past.open(folder) as past:
        return "".join(written(past.lines(number), form, NOON))


def taken(folder, text):
    lines, wrong = read(text)
    assert wrong == ()
    with History.open(folder) as history:
        return take_in(history, lines, NOON)


def told(folder, number=1):
    """All that the screens ask of a drive."""
    with Past.open(folder) as past:
        (line,) = [one for one in past.bays(NOON).drives if one.number == number]
        return {
            "signals": line.signals,
            "findings": line.findings,
            "call": line.call,
            "last": line.last_pass,
            "passes": past.passes(number),
            "days": past.pass_days(number),
            "series": [past.series(number, one.name) for one in line.signals],
            "evidence": past.evidence(number, "pending-sectors"),
            "book": [entry for entry in past.day_book(drive=number) if entry.kind != "watch"],
            "state": past.state(number),
        }


def test_readings_put_together_again_lead_to_the_same_state(tmp_path):
    passes = list(a_life(40))
    with kept(tmp_path) as history:
        state = live(history, passes)
        again = analyser.start()
        for _, pass_ in passes_with_readings(history._db.conn, 1, None):
            again = analyser.advance(again, replace(pass_, drive=HDD)).state
    assert analyser.dump(again) == state


def test_probes_arrive_and_lead_to_the_same_ledgers(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    chance = seeded(1)
    with kept(here) as history:
        known = history.admit(HDD, HERE, NOON)
        state = analyser.start()
        for pass_ in a_life(20):
            day = None
            if (pass_.at - NOON) % DAY == 0:
                retried = 0.02 if pass_.at > NOON + 16 * DAY else 0.0
                day = replace(a_day(chance, 0, retried=retried), at=pass_.at)
                state = analyser.take_in_probe(state, day, rotation_rpm=7200).state
            step = analyser.advance(state, pass_)
            state = step.state
            part = DriveRound(known=known, pass_=pass_, state=analyser.dump(state), call=step.call, probe=day)
            history.record(Round(at=pass_.at, drives=(part,)))
    assert state.probe is not None
    assert state.probe.late.late > 0
    whole = json.loads(exported(here))
    whole["rows"] = [row for row in whole["rows"] if row["record"] not in {"state", "copy"}]
    taken(there, json.dumps(whole))
    with Past.open(there) as past:
        assert past.state(1) == analyser.dump(state)


@pytest.mark.parametrize("form", ["json", "csv"])
def test_a_drive_that_moves_to_another_machine_keeps_its_past(tmp_path, form):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(40))
    before = told(here)
    done = taken(there, exported(here, form))
    assert done.wrong == ()
    assert len(done.done) == 1
    assert told(there) == before


def test_without_the_state_in_the_file_the_readings_lead_to_the_same_one(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        state = live(history, a_life(40))
    whole = json.loads(exported(here))
    whole["rows"] = [row for row in whole["rows"] if row["record"] not in {"state", "copy"}]
    taken(there, json.dumps(whole))
    with Past.open(there) as past:
        assert past.state(1) == state


def test_a_past_that_was_thinned_goes_on_exactly_from_its_dated_copy(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    days = 20 * 7
    with kept(here) as history:
        state = live(history, a_life(days))
        with history._writing() as connection:
            file_past_days(connection, NOON // DAY + days)
        while history.thin(NOON + days * DAY):
            pass
    before = told(here)
    whole = json.loads(exported(here))
    whole["rows"] = [row for row in whole["rows"] if row["record"] != "state"]
    # The newest copies are taken out too, so that weeks have to be lived again.
    copies = sorted(row["at"] for row in whole["rows"] if row["record"] == "copy")
    assert len(copies) > 15
    whole["rows"] = [row for row in whole["rows"] if row["record"] != "copy" or row["at"] <= copies[6]]
    taken(there, json.dumps(whole))
    after = told(there)
    assert after["state"] == state
    assert after == before
    with History.open(there) as history, History.open(here) as other:
        assert history.copies(1) == other.copies(1)


def test_taking_in_again_changes_nothing(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(30))
    text = exported(here)
    taken(there, text)
    before = told(there)
    taken(there, text)
    taken(here, text)
    assert told(there) == before
    assert told(here) == before


@pytest.mark.parametrize("late", [False, True])
def test_two_parts_of_a_life_become_the_whole_one_whichever_comes_last(tmp_path, late):
    """A drive that lived here first and there later, or the other way round."""
    passes = list(a_life(60))
    first, second = passes[:120], passes[120:]
    whole, one, other = tmp_path / "whole", tmp_path / "one", tmp_path / "other"
    with kept(whole) as history:
        state = live(history, passes)
    with kept(one) as history:
        live(history, first)
    with kept(other) as history:
        live(history, second, place=ELSEWHERE)
    source, target = (other, one) if late else (one, other)
    done = taken(target, exported(source))
    assert "added to what is known of it" in done.done[0]
    after, wanted = told(target), told(whole)
    assert after["state"] == state
    for part in ("signals", "findings", "call", "last", "passes", "days"):
        assert after[part] == wanted[part], part
    with History.open(target) as history, History.open(whole) as there:
        assert history.copies(1) == there.copies(1)
        # The place where it is now is this machine's, whatever the file says.
        assert history.known()[0].place == (ELSEWHERE if not late else HERE)


def test_every_dated_copy_leads_to_the_present_state_after_two_lives_were_woven_into_one(tmp_path):
    passes = list(a_life(40))
    for name, part in (("here", passes[1::2]), ("there", passes[0::2])):
        with kept(tmp_path / name) as history:
            live(history, part)
    taken(tmp_path / "here", exported(tmp_path / "there"))
    with kept(tmp_path / "here") as history:
        connection, present = history._db.conn, history.states()[1]
        copies = dated_states(connection, 1)
        assert len(copies) > 4
        for copy in copies:
            state = analyser.load(copy.state)
            for _, pass_ in passes_with_readings(connection, 1, copy):
                state = analyser.advance(state, replace(pass_, drive=HDD)).state
            assert analyser.dump(state) == present


def test_a_round_after_the_arrival_goes_on_from_it(tmp_path):
    passes = list(a_life(60))
    here, there, whole = tmp_path / "here", tmp_path / "there", tmp_path / "whole"
    with kept(here) as history:
        live(history, passes[:150])
    taken(there, exported(here))
    with kept(there) as history, kept(whole) as other:
        assert live(history, passes[150:]) == live(other, passes)
    assert told(there)["days"] == told(whole)["days"]


def test_drives_of_this_machine_are_left_alone_by_those_of_another(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(10))
    with kept(there) as history:
        live(history, a_life(10, seed=2, drive=SSD), SSD)
    before = told(there, 1)
    taken(there, exported(here))
    assert told(there, 1) == before
    with Past.open(there) as past:
        assert {line.drive.identity.serial for line in past.bays(NOON).drives} == {"INV0001", "INV0002"}


def test_rows_that_cannot_be_right_are_named_and_left_out_and_the_rest_arrives(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(5))
    whole = json.loads(exported(here))
    good = len(whole["rows"])
    whole["rows"] += [
        {
            "record": "pass",
            "drive": 1,
            "at": "2026-12-01T12:00:00Z",
            "outcome": "nonsense",
            "exit_bits": 0,
            "took_ms": 0,
            "explanation": None,
        },
        {"record": "value", "drive": 1, "at": "2026-12-01T12:00:00Z", "signal": "x"},
        {"record": "wonder", "drive": 1, "at": "2026-12-01T12:00:00Z"},
        {"record": "pass", "drive": 1, "at": "noon"},
        {"record": "place", "drive": 77, "at": "2026-12-01T12:00:00Z", "device": "x", "bay": None},
        17,
    ]
    lines, wrong = read(json.dumps(whole))
    assert [one.split(" is left out")[0] for one in wrong] == [f"row {good + 4}", f"row {good + 6}"]
    with History.open(there) as history:
        done = take_in(history, lines, NOON)
    assert [one.split(" ")[1] for one in done.wrong] == ["1", str(good + 1), str(good + 2), str(good + 3)]
    assert "no row says who it is" in done.wrong[0]
    with Past.open(there) as past:
        assert len(past.passes(1)) == 20


def test_what_fails_under_way_leaves_all_as_it_was(tmp_path, monkeypatch):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(5))
    with kept(there) as history:
        live(history, a_life(5, drive=SSD), SSD)
        before = list(history._db.conn.iterdump())
        lines, _ = read(exported(here))
        monkeypatch.setattr("diskwatch.service.arrival.analyser.advance", None)
        monkeypatch.setattr("diskwatch.service.arrival.analyser.load", None)
        with pytest.raises(TypeError):
            take_in(history, lines, NOON)
        assert list(history._db.conn.iterdump()) == before


def _with_an_odd_clock(passes):
    """The same passes, three of one second now and then, and the clock set back to seconds that were used."""
    back, last = 0, None
    for step, pass_ in enumerate(passes):
        if step in {30, 90}:
            back += DAY if step == 30 else 3 * DAY
        if last is None or step % 7 > 1:
            last = pass_.at - back
        yield replace(pass_, at=last)


@pytest.mark.parametrize("drop", [(), ("state",), ("state", "copy")], ids=["whole", "no state", "nor copies"])
def test_what_an_odd_clock_brought_leads_to_the_same_state_here_and_elsewhere(tmp_path, drop):
    here, there = tmp_path / "here", tmp_path / "there"
    passes = list(_with_an_odd_clock(a_life(40)))
    assert len({one.at for one in passes}) < len(passes) - 40
    with kept(here) as history:
        state = live(history, passes)
        again = analyser.start()
        for _, pass_ in passes_with_readings(history._db.conn, 1, None):
            again = analyser.advance(again, replace(pass_, drive=HDD)).state
        assert analyser.dump(again) == state
        for copy in dated_states(history._db.conn, 1):
            again = analyser.load(copy.state)
            for _, pass_ in passes_with_readings(history._db.conn, 1, copy):
                again = analyser.advance(again, replace(pass_, drive=HDD)).state
            assert analyser.dump(again) == state
    whole = json.loads(exported(here))
    whole["rows"] = [row for row in whole["rows"] if row["record"] not in drop]
    before = told(here)
    taken(there, json.dumps(whole))
    assert told(there) == before
    taken(there, json.dumps(whole))
    assert told(there) == before


def test_a_drive_whose_clock_was_odd_elsewhere_goes_on_here_as_if_it_had_never_moved(tmp_path):
    here, there, all_ = tmp_path / "here", tmp_path / "there", tmp_path / "all"
    passes = list(_with_an_odd_clock(a_life(40)))
    with kept(all_) as history:
        state = live(history, passes)
    with kept(here) as history:
        live(history, passes[:100])
    taken(there, exported(here))
    with kept(there) as history:
        assert live(history, passes[100:]) == state
    assert told(there) == told(all_)


def test_what_the_owner_said_travels_and_the_word_said_last_stands(tmp_path):
    here, there = tmp_path / "here", tmp_path / "there"
    with kept(here) as history:
        live(history, a_life(3))
        history.tell(1, {"label": "attic", "asset": "A-1"}, NOON)
        history.tell(1, {"backed-up": ""}, NOON + 9)
    with kept(there) as history:
        live(history, a_life(3, begin=NOON + 9 * DAY), place=ELSEWHERE)
        history.tell(1, {"asset": "B-2"}, NOON + DAY)
        history.tell(1, {"label": "cellar", "backed-up": "2026-11-30"}, NOON - DAY)
    taken(there, exported(here))
    taken(here, exported(there))
    for folder in (here, there):
        with History.open(folder) as history:
            said = history._db.conn.execute("SELECT fact, value, at FROM owner_fact ORDER BY fact").fetchall()
        assert said == [
            ("asset", "B-2", NOON + DAY),
            ("backed-up", "", NOON + 9),
            ("label", "attic", NOON),
        ]


def seen_to(history, at):
    settle(history, {"drive": 1, "because": "it was seen to", "replaced_by": None}, at)


def pending(pass_):
    return (pass_.reading.number("pending-sectors") or 0) if pass_.reading else 0


@pytest.mark.parametrize("left_out", [set(), {"state", "copy"}])
@pytest.mark.parametrize(
    ("lived", "later"), [(1, 1), (1, 0), (0, 0)], ids=["later", "behind a pass of its second", "before one"]
)
def test_what_the_owner_said_was_seen_to_is_heard_again_in_its_place_wherever_the_past_is_judged_anew(
    tmp_path, left_out, lived, later
):
    here, there = tmp_path / "here", tmp_path / "there"
    passes = list(a_life(30))
    rise = next(n for n in range(40, 120) if pending(passes[n]) > pending(passes[n - 1]) > 0)
    with kept(here) as history:
        live(history, passes[: rise + lived])
        seen_to(history, passes[rise].at + later)
        state = live(history, passes[rise + lived :])
    assert analyser.load(state).word is not None
    whole = json.loads(exported(here))
    whole["rows"] = [row for row in whole["rows"] if row["record"] not in left_out]
    taken(there, json.dumps(whole))
    with Past.open(there) as past:
        assert past.state(1) == state


def test_passes_from_before_the_owners_word_that_come_later_leave_it_in_its_place(tmp_path):
    here, there, whole = tmp_path / "here", tmp_path / "there", tmp_path / "whole"
    passes = list(a_life(30))
    with kept(there) as history:
        live(history, passes[:40])
    for folder, begin in ((here, 40), (whole, 0)):
        with kept(folder) as history:
            live(history, passes[begin:80])
            seen_to(history, passes[79].at + 1)
            state = live(history, passes[80:])
    taken(here, exported(there))
    with Past.open(here) as past:
        assert past.state(1) == state
        (line,) = past.bays(passes[-1].at).drives
    assert line.call == analyser.load(state).call
