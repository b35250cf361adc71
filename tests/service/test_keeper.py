import os
import shutil
import sqlite3
import subprocess
from contextlib import closing
from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.errors import HistoryError, HistoryHeld, HistoryTooNew
from diskwatch.history.proof import Printed
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import CallWord, DriveRound, Entry, Place, Round
from diskwatch.service.keeper import Keeper
from tests.history.examples import a_span
from tests.samples import DAY, HDD, HERE, NOON, SSD, read

THERE = Place(device="/dev/sdb", bay="ata-9")


def a_round(keeper, at=NOON):
    known = keeper.known[0] if keeper.known else keeper.admit(HDD, HERE, at)
    part = DriveRound(known=known, pass_=read(at, pending_sectors=1), state="{}")
    return Round(
        at=at, drives=(part,), entries=(Entry(at=at, drive=known.number, kind="watch", text="A round."),)
    )


def entries(folder):
    with Past.open(folder) as past:
        return [entry.text for entry in past.day_book()]


def test_a_round_is_kept_and_known_after_a_restart(tmp_path):
    keeper = Keeper(tmp_path)
    keeper.record(a_round(keeper))
    keeper.close()
    again = Keeper(tmp_path)
    assert [known.drive for known in again.known] == [HDD]
    assert again.state(again.known[0].number) == "{}"
    again.close()


def test_numbers_go_on_where_they_stopped(tmp_path):
    keeper = Keeper(tmp_path)
    keeper.record(a_round(keeper))
    keeper.close()
    again = Keeper(tmp_path)
    assert again.admit(HDD, HERE, NOON).number == 2
    again.close()


def test_a_folder_that_cannot_be_made_is_a_trouble_and_not_an_end(tmp_path):
    blocked = tmp_path / "file"
    blocked.write_text("not a folder")
    keeper = Keeper(blocked / "state")
    assert keeper.trouble
    keeper.record(a_round(keeper))
    assert keeper.waiting == 1
    keeper.close()


def test_what_could_not_be_written_is_written_when_the_trouble_is_over(tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper = Keeper(blocked)
    keeper.record(a_round(keeper))
    keeper.record(a_round(keeper, NOON + 60))
    blocked.unlink()
    keeper.try_again()
    assert (keeper.trouble, keeper.waiting) == (None, 0)
    keeper.close()
    assert entries(blocked) == ["A round.", "A round."]


def test_a_disk_that_fills_up_loses_nothing_that_was_judged(tmp_path):
    keeper = Keeper(tmp_path)
    assert keeper._history is not None
    connection = keeper._history._db.conn
    (pages,) = connection.execute("PRAGMA page_count").fetchone()
    connection.execute(f"PRAGMA max_page_count = {pages}")
    for number in range(300):
        keeper.note(Entry(at=NOON, drive=None, kind="watch", text=f"{number} " + "x" * 400))
    assert "full" in (keeper.trouble or "")
    connection.execute("PRAGMA max_page_count = 1000000")
    keeper.try_again()
    assert keeper.trouble is None
    keeper.close()
    assert [text.split()[0] for text in entries(tmp_path)] == [str(number) for number in range(300)]


def test_what_waits_is_bounded(tmp_path, monkeypatch):
    monkeypatch.setattr("diskwatch.service.keeper.MOST_WAITING", 5)
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper = Keeper(blocked)
    for number in range(9):
        keeper.note(Entry(at=NOON, drive=None, kind="watch", text=str(number)))
    assert keeper.waiting == 5
    assert "the oldest 4 were given up" in (keeper.trouble or "")
    blocked.unlink()
    keeper.try_again()
    keeper.close()
    *kept, said = entries(blocked)
    assert kept == ["4", "5", "6", "7", "8"]
    assert "the oldest 4 writes were given up" in said


def test_a_history_of_a_newer_version_is_refused(tmp_path):
    Keeper(tmp_path).close()
    db = sqlite3.connect(tmp_path / "history.db")
    db.execute("PRAGMA user_version = 999")
    db.commit()
    db.close()
    with pytest.raises(HistoryTooNew):
        Keeper(tmp_path)


def test_a_history_that_another_process_writes_is_refused(tmp_path):
    keeper = Keeper(tmp_path)
    with pytest.raises(HistoryHeld):
        Keeper(tmp_path)
    keeper.close()


def test_what_need_not_be_done_now_is_left_out_where_no_history_is_in_reach(tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper = Keeper(blocked)
    assert keeper.ask(lambda history: history.known()) is None
    blocked.unlink()
    keeper.try_again()
    assert keeper.ask(lambda history: history.known()) == ()
    keeper.close()


def test_a_history_that_was_let_go_is_taken_up_again_with_all_that_waited(tmp_path):
    keeper = Keeper(tmp_path)
    keeper.record(a_round(keeper))
    keeper.let_go("It is being mended.")
    assert keeper.trouble == "It is being mended."
    with History.open(tmp_path):
        keeper.record(a_round(keeper, NOON + 60))
        keeper.try_again()
        assert keeper.waiting == 1
        assert keeper.trouble == "It is being mended."
    keeper.come_back()
    assert keeper.waiting == 0
    assert keeper.ask(History.known)
    keeper.close()
    assert entries(tmp_path) == ["A round.", "A round."]


def test_damage_is_told_from_every_other_trouble(tmp_path):
    Keeper(tmp_path).close()
    (tmp_path / "history.db").write_bytes(b"no database" * 100)
    keeper = Keeper(tmp_path)
    assert keeper.damaged
    keeper.close()
    for lock in tmp_path.glob("*.lock"):
        lock.unlink()
    # Nothing says any more that the file is ours, and what is not ours is not ours to mend.
    keeper = Keeper(tmp_path)
    assert (keeper.damaged, keeper.trouble is None) == (False, False)
    keeper.close()
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper = Keeper(blocked)
    assert (keeper.damaged, keeper.trouble is None) == (False, False)
    keeper.close()


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root to mount a file system of its own")
def test_a_read_only_folder_is_still_judged_by_its_past(tmp_path):
    state = tmp_path / "state"
    state.mkdir()
    made = subprocess.run(["mount", "-t", "tmpfs", "none", str(state)], capture_output=True, check=False)
    if made.returncode != 0:
        pytest.skip("this machine lets nobody mount anything")
    try:
        keeper = Keeper(state)
        keeper.record(a_round(keeper))
        keeper.close()
        subprocess.run(["mount", "-o", "remount,ro", str(state)], check=True)
        keeper = Keeper(state)
        assert keeper.trouble
        assert keeper.state(1) == "{}"
        assert [known.number for known in keeper.known] == [1]
        keeper.close()
    finally:
        subprocess.run(["umount", "-l", str(state)], check=False)


def test_after_a_change_by_the_owner_what_was_remembered_is_void(tmp_path):
    keeper = Keeper(tmp_path)
    keeper.record(a_round(keeper))
    before = keeper.epoch
    assert keeper.change(lambda history: history.admit(HDD, HERE, NOON).number) == 2
    assert (len(keeper.known), keeper.epoch) == (2, before + 1)
    keeper.close()


def test_a_change_is_refused_where_the_history_cannot_be_written(tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper = Keeper(blocked)
    with pytest.raises(HistoryError, match="cannot be written now"):
        keeper.change(lambda history: history.known())
    keeper.close()


def test_answers_in_full_are_kept_but_wait_for_nothing(tmp_path):
    def answered(keeper, at):
        finished = a_round(keeper, at)
        (part,) = finished.drives
        return replace(finished, drives=(replace(part, pass_=replace(part.pass_, answer=f"all of {at}")),))

    keeper = Keeper(tmp_path)
    keeper.record(answered(keeper, NOON))
    keeper.let_go("it is away")
    keeper.record(answered(keeper, NOON + 86_400))
    keeper.come_back()
    keeper.close()
    with Past.open(tmp_path) as past:
        assert len(past.passes(1)) == 2
        assert past.printed(1) == Printed(at=NOON, text=f"all of {NOON}")


def judged(keeper, *passes):
    """Let passes of drives go through the analyser and into the keeper, as rounds do."""
    for known, pass_ in passes:
        kept = keeper.state(known.number)
        state = analyser.start() if kept is None else analyser.load(kept)
        step = analyser.advance(state, pass_)
        part = DriveRound(
            known=known,
            pass_=pass_,
            state=analyser.dump(step.state),
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        happened = tuple(replace(entry, drive=known.number) for entry in step.happened)
        keeper.record(Round(at=pass_.at, drives=(part,), entries=happened))


def a_past(keeper, begin=NOON):
    """Two drives over three weeks; the first one has a pending sector from the second week on."""
    first, second = keeper.admit(HDD, HERE, begin), keeper.admit(SSD, THERE, begin)
    for day in range(21):
        at = begin + day * DAY
        judged(keeper, (first, read(at, HDD, pending_sectors=int(day >= 10))), (second, read(at, SSD)))
    return first, second


def calls(folder):
    with Past.open(folder) as past:
        return {line.number: line.call and line.call.word for line in past.bays(NOON).drives}


def troubles(folder):
    with Past.open(folder) as past:
        return [entry.text for entry in past.day_book(kinds={"trouble"})]


def spoil(folder, statement):
    with closing(sqlite3.connect(folder / "history.db")) as connection, connection:
        assert connection.execute(statement).rowcount > 0


@pytest.mark.parametrize(
    "spoilt",
    ["substr(packed, 1, 20) || x'00' || substr(packed, 22)", "x'789c0000'", "x''"],
)
def test_a_state_that_cannot_be_read_costs_no_drive_its_past(tmp_path, spoilt):
    keeper = Keeper(tmp_path)
    first, second = a_past(keeper)
    before = {one.number: keeper.state(one.number) for one in (first, second)}
    keeper.close()
    stood = calls(tmp_path)
    assert stood[first.number] is CallWord.LOOK
    spoil(tmp_path, f"UPDATE analyser_state SET packed = CAST({spoilt} AS BLOB) WHERE drive = {first.number}")  # noqa: S608
    again = Keeper(tmp_path, now=lambda: NOON)
    assert again.trouble is None
    assert {number: again.state(number) for number in before} == before
    again.close()
    assert calls(tmp_path) == stood
    said = troubles(tmp_path)
    assert len(said) == 2
    assert "could not be read" in said[0]
    assert "worked out again" in said[1]
    Keeper(tmp_path).close()
    assert troubles(tmp_path) == said


def test_a_state_that_was_lost_whole_is_worked_out_again(tmp_path):
    keeper = Keeper(tmp_path)
    first, _ = a_past(keeper)
    before = keeper.state(first.number)
    keeper.close()
    spoil(tmp_path, f"DELETE FROM analyser_state WHERE drive = {first.number}")  # noqa: S608
    again = Keeper(tmp_path)
    assert again.state(first.number) == before
    again.close()


def test_nothing_is_written_to_a_history_whose_past_cannot_be_read(tmp_path, monkeypatch):
    keeper = Keeper(tmp_path)
    first, _ = a_past(keeper)
    keeper.close()

    def fails(*_args, **_more):
        raise HistoryError("invented")

    monkeypatch.setattr(History, "states", fails)
    again = Keeper(tmp_path)
    assert "invented" in (again.trouble or "")
    judged(again, (first, read(NOON + 99 * DAY, HDD)))
    assert again.waiting == 1
    with Past.open(tmp_path) as past:
        assert len(past.passes(first.number)) == 21
    monkeypatch.undo()
    again.try_again()
    assert again.trouble is None
    again.close()
    with Past.open(tmp_path) as past:
        assert len(past.passes(first.number)) == 22


def test_where_the_folder_vanishes_a_new_history_is_begun_with_what_is_thought_of_the_drives(tmp_path):
    keeper = Keeper(tmp_path / "state")
    first, second = a_past(keeper)
    stood = calls(tmp_path / "state")
    (tmp_path / "state").rename(tmp_path / "away")
    keeper.add_traffic([a_span(second.number, NOON + 30 * DAY)])
    assert (keeper.trouble, keeper.waiting) == (None, 0)
    assert calls(tmp_path / "state") == stood
    judged(keeper, (first, read(NOON + 30 * DAY, HDD, pending_sectors=1)))
    before = keeper.state(first.number)
    keeper.close()
    again = Keeper(tmp_path / "state")
    assert again.state(first.number) == before
    spoil(tmp_path / "state", f"DELETE FROM analyser_state WHERE drive = {first.number}")  # noqa: S608
    again.close()
    # Also from the new file alone the state can be worked out again.
    last = Keeper(tmp_path / "state")
    assert last.state(first.number) == before
    last.close()
    assert any("a new one was begun" in text for text in entries(tmp_path / "state"))


def test_a_history_that_is_put_back_is_taken_up_again(tmp_path):
    state, away = tmp_path / "state", tmp_path / "away"
    keeper = Keeper(state)
    first, _ = a_past(keeper)
    state.rename(away)
    judged(keeper, (first, read(NOON + 30 * DAY, HDD, pending_sectors=1)))
    shutil.rmtree(state)
    away.rename(state)
    judged(keeper, (first, read(NOON + 31 * DAY, HDD, pending_sectors=1)))
    assert (keeper.trouble, keeper.waiting) == (None, 0)
    keeper.close()
    with Past.open(state) as past:
        assert len(past.passes(first.number)) == 22


def test_a_write_that_speaks_of_a_drive_that_no_round_has_written_fits_all_the_same(tmp_path):
    keeper = Keeper(tmp_path)
    known = keeper.admit(HDD, HERE, NOON)
    keeper.add_traffic([a_span(known.number)])
    assert (keeper.trouble, keeper.waiting) == (None, 0)
    keeper.close()


def test_a_write_that_does_not_fit_is_left_out_with_a_word_and_stops_nothing(tmp_path):
    keeper = Keeper(tmp_path, now=lambda: NOON)
    keeper.add_traffic([a_span(99)])
    keeper.note(Entry(at=NOON, drive=None, kind="watch", text="It goes on."))
    assert (keeper.trouble, keeper.waiting) == (None, 0)
    keeper.close()
    said, went_on = entries(tmp_path)
    assert said.startswith("Left out, a stretch of traffic: ")
    assert went_on == "It goes on."


def test_what_was_seen_before_the_history_came_into_reach_is_joined_to_its_past(tmp_path):
    state, away = tmp_path / "state", tmp_path / "away"
    keeper = Keeper(state)
    first, second = a_past(keeper)
    keeper.close()
    state.rename(away)
    state.write_text("in the way")
    blind = Keeper(state)
    # In another order than before, so that the numbers are others.
    there, here = blind.admit(SSD, THERE, NOON + 30 * DAY), blind.admit(HDD, HERE, NOON + 30 * DAY)
    judged(blind, (there, read(NOON + 30 * DAY, SSD)), (here, read(NOON + 30 * DAY, HDD, pending_sectors=3)))
    blind.add_traffic([a_span(here.number, NOON + 30 * DAY)])
    assert blind.waiting == 3
    state.unlink()
    away.rename(state)
    blind.try_again()
    assert (blind.trouble, blind.waiting, blind.epoch) == (None, 0, 1)
    assert [known.drive for known in blind.known] == [HDD, SSD]
    blind.close()
    with Past.open(state) as past:
        assert [len(past.passes(number)) for number in (first.number, second.number)] == [22, 22]
        assert past.traffic(first.number, NOON, NOON + 40 * DAY)
        assert past.series(first.number, "pending-sectors")[-1] == (NOON + 30 * DAY, 3)
        kept = past.state(first.number)
    # The same as if it had never been out of reach.
    other = Keeper(tmp_path / "other")
    one, _ = a_past(other)
    judged(other, (one, read(NOON + 30 * DAY, HDD, pending_sectors=3)))
    assert other.state(one.number) == kept
    other.close()
