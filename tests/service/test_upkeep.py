import threading
from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.errors import HistoryGarbled
from diskwatch.history import care, folding, keeping
from diskwatch.history.care import copies
from diskwatch.history.reader import Past
from diskwatch.history.rescue import rescue
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import Direction, DriveRound, Entry, IoCounts, IoSpan, Round
from diskwatch.service import upkeep
from diskwatch.service.keeper import Keeper
from diskwatch.service.upkeep import Upkeep
from tests.samples import DAY, HDD, HERE, NOON, read

WEEKS = keeping.DETAIL_COPIES + 3


@pytest.fixture(autouse=True)
def _breathless(monkeypatch):
    monkeypatch.setattr(upkeep, "BREATH", 0)


class Clock:
    def __init__(self, at):
        self.at = at

    def __call__(self):
        return self.at


@pytest.fixture
def clock():
    return Clock(NOON)


@pytest.fixture
def made(tmp_path, clock):
    keepers = []

    def make(*, backup="never", folder=tmp_path):
        keeper = Keeper(folder)
        keepers.append(keeper)
        return keeper, Upkeep(
            keeper, folder, lock=threading.Lock(), backup=backup, now=clock, ending=threading.Event()
        )

    yield make
    for keeper in keepers:
        keeper.close()


def rounds(keeper, days):
    known = keeper.known[0] if keeper.known else keeper.admit(HDD, HERE, NOON)
    for at in range(NOON, NOON + days * DAY, DAY // 3):
        state = analyser.dump(replace(analyser.start(), last_at=at))
        part = DriveRound(
            known=known, pass_=read(at, power_on_hours=at // 3600, pending_sectors=0), state=state
        )
        keeper.record(Round(at=at, drives=(part,)))


def span(at, reads=4000):
    counts = IoCounts(
        reads=reads, writes=0, read_bytes=reads * 4096, write_bytes=0, read_ms=reads * 6, write_ms=0, busy_ms=9
    )
    return IoSpan(drive=1, at=at, seconds=300.0, counts=counts)


def book(folder):
    with Past.open(folder) as past:
        return [(entry.kind, entry.text) for entry in past.day_book()]


def turn_a_byte(folder, offset):
    with (folder / HISTORY).open("r+b") as file:
        file.seek(offset)
        file.write(b"\xff")


def test_days_that_are_over_are_condensed_by_class_of_load(made, tmp_path, clock):
    keeper, one = made()
    rounds(keeper, 1)
    keeper.add_traffic([span(NOON + 300 * number) for number in range(1, 13)])
    one.turn()
    with Past.open(tmp_path) as past:
        assert past.class_days(1, 0, 2**40) == ()
    clock.at += DAY
    one.turn()
    with Past.open(tmp_path) as past:
        ((day, condensed),) = past.class_days(1, 0, 2**40)
    assert day == NOON // DAY
    assert (condensed.direction, condensed.rollups, condensed.operations) == (Direction.READ, 12, 48_000)
    # 6 ms a read: 2^(41/16) is 5.9.
    assert condensed.histogram == {41: 12}


def test_old_detail_is_thinned_and_the_counts_of_passes_stay(made, tmp_path, clock):
    keeper, one = made()
    rounds(keeper, WEEKS * 7)
    clock.at = NOON + WEEKS * 7 * DAY
    assert keeper._history is not None
    with keeper._history._writing() as connection:
        file_past_days(connection, clock.at // DAY)
    with Past.open(tmp_path) as past:
        before = past.pass_days(1)
    one.turn()
    with Past.open(tmp_path) as past:
        assert past.pass_days(1) == before
        assert len(past.passes(1)) < sum(day.passes for day in before)
        assert len(past.series(1, "power-on-hours")) < WEEKS * 7 * 3


def test_whoever_waits_for_the_keeper_does_not_wait_until_the_log_is_folded_in(made, tmp_path, monkeypatch):
    keeper, one = made()
    log = tmp_path / f"{HISTORY}-wal"
    free = []
    fold = History.fold_log

    def folded(history):
        free.append(not one._lock.locked())
        fold(history)

    monkeypatch.setattr(History, "fold_log", folded)
    text = "x" * 4000
    keeper.note(*(Entry(at=NOON, drive=None, kind="watch", text=text) for _ in range(1_200)))
    assert log.stat().st_size > folding.KEPT_BYTES
    one.turn()
    keeper.note(Entry(at=NOON, drive=None, kind="watch", text=text))
    assert log.stat().st_size == folding.KEPT_BYTES
    assert free
    assert all(free)


def test_a_copy_is_laid_beside_the_history_as_the_owner_wishes(made, tmp_path, clock):
    keeper, one = made(backup="daily")
    rounds(keeper, 1)
    one.turn()
    one.turn()
    assert len(copies(tmp_path)) == 1
    clock.at += DAY
    one.turn()
    assert len(copies(tmp_path)) == 2


@pytest.fixture
def looks(monkeypatch):
    """How thorough each look for damage was."""
    made = []

    def look(path, *, thorough, stop):
        made.append(thorough)
        return care.check(path, thorough=thorough, stop=stop)

    monkeypatch.setattr(upkeep, "check", look)
    return made


def test_the_file_is_looked_through_after_the_start_and_thoroughly_every_week(made, looks, clock):
    keeper, one = made()
    rounds(keeper, 1)
    for _ in range(3):
        one.turn()
    assert looks == [True]
    clock.at += 8 * DAY
    one.turn()
    one.turn()
    assert looks == [True, True]
    keeper.close()
    made()[1].turn()
    assert looks == [True, True, False]


def test_a_clock_a_year_ahead_puts_off_no_look(made, looks, clock):
    keeper, one = made()
    rounds(keeper, 1)
    clock.at += 365 * DAY
    one.turn()
    clock.at -= 365 * DAY
    one.turn()
    one.turn()
    assert looks == [True, True]


def test_damage_found_under_way_is_mended_while_the_watch_goes_on(made, tmp_path):
    keeper, one = made()
    rounds(keeper, 5)
    keeper.close()
    keeper, one = made()
    # The root page of the table of sentences: an empty leaf, whose loss costs nothing.
    assert keeper._history is not None
    (page,) = keeper._history._db.conn.execute(
        "SELECT rootpage FROM sqlite_master WHERE name = 'sentence'"
    ).fetchone()
    turn_a_byte(tmp_path, (page - 1) * 4096)
    one.turn()
    assert keeper.trouble is None
    rounds(keeper, 6)
    keeper.close()
    aside = list(tmp_path.glob("history-damaged-*.db"))
    assert len(aside) == 1
    with Past.open(tmp_path) as past:
        # The days are lived twice, as with a clock that was set back: every pass of either time is kept.
        assert len(past.passes(1)) == 15 + 18
    assert any(aside[0].name in text for kind, text in book(tmp_path) if kind == "trouble")


def test_a_history_that_is_damaged_at_the_start_is_mended_before_anything_is_kept(made, tmp_path):
    keeper, _ = made()
    rounds(keeper, 5)
    keeper.close()
    turn_a_byte(tmp_path, 0)
    keeper, one = made()
    assert keeper.damaged
    one.mend_if_damaged()
    assert (keeper.damaged, keeper.trouble) == (False, None)
    keeper.close()
    with Past.open(tmp_path) as past:
        assert len(past.passes(1)) == 15


def test_a_value_that_cannot_be_right_is_taken_out_while_the_watch_goes_on(made, tmp_path):
    keeper, one = made()
    rounds(keeper, 2)
    keeper.note(Entry(at=NOON, drive=1, kind="watch", text="Said.", data={"n": 1}))
    keeper.close()
    keeper, one = made()
    with keeper._history._writing() as connection:
        connection.execute("UPDATE day_book SET data = '['")
        connection.execute("UPDATE pass SET outcome = 'reae' WHERE at = ?", (NOON,))
    with Past.open(tmp_path) as past, pytest.raises(HistoryGarbled, match="'reae' is not a valid Outcome"):
        past.passes(1)
    one.turn()
    assert keeper.trouble is None
    told = book(tmp_path)
    assert ("watch", "Said.") in told
    assert len([text for kind, text in told if kind == "trouble" and "could not be read" in text]) == 2
    with Past.open(tmp_path) as past:
        assert len(past.passes(1)) == 5
    one._looked = False
    one.turn()
    assert book(tmp_path) == told


def test_what_comes_while_it_is_mended_waits_and_is_kept(made, tmp_path, monkeypatch):
    keeper, one = made()
    rounds(keeper, 2)

    def rescued(folder, at):
        rounds(keeper, 3)
        assert keeper.waiting == 9
        assert keeper.trouble == "The history is damaged; what can be read of it is being carried over."
        return rescue(folder, at)

    keeper.close()
    turn_a_byte(tmp_path, 0)
    keeper, one = made()
    monkeypatch.setattr(upkeep, "rescue", rescued)
    one.turn()
    assert (keeper.trouble, keeper.waiting) == (None, 0)


def test_what_keeps_a_copy_from_being_made_is_said_once(made, tmp_path):
    keeper, one = made(backup="daily")
    rounds(keeper, 1)
    (tmp_path / ".history-2024-10-04.db.making").mkdir()
    one.turn()
    one.turn()
    told = [text for kind, text in book(tmp_path) if kind == "trouble"]
    assert len(told) == 1
    assert "history-2024-10-04.db" in told[0]


def test_without_a_history_nothing_is_done_and_nothing_fails(made, tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    keeper, one = made(backup="daily", folder=blocked)
    one.turn()
    assert keeper.trouble
