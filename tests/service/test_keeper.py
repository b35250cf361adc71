import os
import sqlite3
import subprocess
from dataclasses import replace

import pytest

from diskwatch.errors import HistoryError, HistoryHeld, HistoryTooNew
from diskwatch.history.proof import Printed
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import DriveRound, Entry, Round
from diskwatch.service.keeper import Keeper
from tests.samples import HDD, HERE, NOON, read


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
    blocked.unlink()
    keeper.try_again()
    keeper.close()
    assert entries(blocked) == ["4", "5", "6", "7", "8"]


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
