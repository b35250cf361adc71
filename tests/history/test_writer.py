import os
import random
import sqlite3
import subprocess
import sys
import threading
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.errors import HistoryError, HistoryHeld
from diskwatch.history import writer
from diskwatch.history.beginning import begun, prepared
from diskwatch.history.lock import watcher
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY, WATCH_LOCK, WRITE_LOCK
from diskwatch.records import Entry
from tests.history.examples import DAY, NOON, a_call, a_drive, a_part, a_place, a_round, a_span, full_round


def _dump(history: History) -> list[str]:
    return list(history._db.conn.iterdump())


def _integrity(path: Path) -> list[tuple[str]]:
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute("PRAGMA integrity_check").fetchall()


def test_opening_makes_folder_and_file_that_others_may_read_whatever_the_umask(folder):
    before = os.umask(0o077)
    try:
        with History.open(folder) as history:
            history.admit(a_drive(), a_place(), NOON)
            modes = {file.name: file.stat().st_mode & 0o777 for file in folder.iterdir()}
    finally:
        os.umask(before)
    assert folder.stat().st_mode & 0o777 == 0o755
    assert modes.pop(WRITE_LOCK) == 0o600
    assert modes == dict.fromkeys((HISTORY, HISTORY + "-wal", HISTORY + "-shm", WATCH_LOCK), 0o644)


def test_a_folder_that_is_there_keeps_its_rights(folder):
    folder.mkdir(mode=0o700)
    History.open(folder).close()
    assert folder.stat().st_mode & 0o777 == 0o700


def test_what_is_recorded_outlives_a_power_cut_and_names_only_what_exists(folder):
    with History.open(folder) as history:
        ask = history._db.conn.execute
        assert ask("PRAGMA journal_mode").fetchone() == ("wal",)
        assert ask("PRAGMA synchronous").fetchone() == (2,)
        assert ask("PRAGMA foreign_keys").fetchone() == (1,)
        assert ask("PRAGMA busy_timeout").fetchone()[0] >= 1000


def test_all_is_in_the_one_file_after_closing_even_with_a_reader_open(folder):
    with History.open(folder) as history:
        history.record(full_round(history.admit(a_drive(), a_place(), NOON)))
        reader = Past.open(folder)
        reader.bays(NOON)
    log = folder / (HISTORY + "-wal")
    assert not log.exists() or log.stat().st_size == 0
    reader.close()


def test_drives_come_back_with_their_numbers(folder):
    with History.open(folder) as history:
        first = history.admit(a_drive(), a_place(), NOON)
        second = history.admit(a_drive("INVENTED-2"), a_place("/dev/sdb", None), NOON + 1)
        assert [first.number, second.number] == [1, 2]
    with History.open(folder) as history:
        assert history.known() == (first, second)


def test_a_number_is_never_given_twice(folder):
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        last = history.admit(a_drive("INVENTED-2"), a_place(), NOON)
        with history._writing() as connection:
            connection.execute("DELETE FROM plugged WHERE drive = ?", (last.number,))
            connection.execute("DELETE FROM drive WHERE number = ?", (last.number,))
    with History.open(folder) as history:
        assert history.admit(a_drive("INVENTED-3"), a_place(), NOON).number == last.number + 1


def test_states_and_calls_come_back(folder):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        assert (history.states(), history.calls()) == ({}, {})
        history.record(a_round(a_part(known, state='{"ledger": 1}', call=a_call())))
    with History.open(folder) as history:
        assert history.states() == {known.number: '{"ledger": 1}'}
        assert history.calls() == {known.number: a_call()}


def test_a_drive_is_known_as_it_last_described_itself(history):
    known = history.admit(a_drive(), a_place(), NOON)
    now = type(known)(
        number=known.number,
        drive=a_drive(firmware="AT02"),
        place=a_place("/dev/sdc", "ata-4"),
        first_seen=known.first_seen,
    )
    history.record(a_round(a_part(now)))
    assert history.known() == (now,)


def test_notes_go_into_the_day_book_together(history):
    stranger = Entry(at=NOON, drive=99, kind="moved", text="A drive that nobody knows.")
    with pytest.raises(HistoryError):
        history.note(Entry(at=NOON, drive=None, kind="watch", text="The watch began."), stranger)
    assert history._db["day_book"].count == 0
    history.note()


def test_traffic_adds_up_within_a_minute_however_it_is_handed_over(history):
    history.admit(a_drive(), a_place(), NOON)
    spans = [a_span(at=NOON + ten * 10, reads=ten) for ten in range(1, 13)]
    history.add_traffic(spans)
    together = history._db.conn.execute("SELECT at, drive, * FROM io_minute").fetchall()
    with history._writing() as connection:
        connection.execute("DELETE FROM io_minute")
    for one in spans:
        history.add_traffic([one])
    history.add_traffic([])
    assert history._db.conn.execute("SELECT at, drive, * FROM io_minute").fetchall() == together
    assert [(*row[:2], *row[5:7]) for row in together] == [(NOON, 1, 60_000, 21), (NOON + 60, 1, 60_000, 57)]


def test_traffic_of_a_drive_that_nobody_knows_is_refused_whole(history):
    history.admit(a_drive(), a_place(), NOON)
    with pytest.raises(HistoryError):
        history.add_traffic([a_span(1), a_span(2)])
    assert history._db["io_minute"].count == 0


def test_closing_twice_does_nothing_and_a_closed_history_says_so(folder):
    history = History.open(folder)
    history.close()
    history.close()
    with pytest.raises(HistoryError, match="closed"):
        history.known()
    with pytest.raises(HistoryError, match="closed"):
        history.note()


def test_a_history_in_memory_does_the_same_without_any_file(history):
    known = history.admit(a_drive(), a_place(), NOON)
    history.record(full_round(known))
    assert history.states() == {known.number: "state 1"}


# Bad days


class _Rigged(sqlite3.Connection):
    """A connection whose statement number ``fails_at`` fails; with ``fails_on`` all after it too."""

    fails_at = 0
    fails_on = False

    def _count(self) -> None:
        self.fails_at -= 1
        if self.fails_at == 0 or (self.fails_on and self.fails_at < 0):
            raise sqlite3.OperationalError("rigged")

    def execute(self, *arguments):
        self._count()
        return super().execute(*arguments)

    def executemany(self, *arguments):
        self._count()
        return super().executemany(*arguments)


@pytest.fixture
def rigged(folder):
    folder.mkdir()
    path = folder / HISTORY
    connection = sqlite3.connect(path, factory=_Rigged)
    with History(prepared(connection, path), path, None) as history:
        yield history


def test_whichever_statement_of_a_round_fails_all_of_it_is_stored_or_nothing(rigged):
    known = rigged.admit(a_drive(), a_place(), NOON)
    rigged.record(full_round(known))
    before = _dump(rigged)
    connection = rigged._db.conn
    for fails_at in range(1, 500):
        connection.fails_at = fails_at
        try:
            rigged.record(full_round(known, NOON + DAY, 2))
        except HistoryError as error:
            assert "rigged" in str(error)  # noqa: PT017  # one round of the loop must end without an error
            connection.fails_at = 0
            assert _dump(rigged) == before, fails_at
        else:
            break
    assert 20 < fails_at < 500, "the last round went through untouched, after every statement had failed once"
    connection.fails_at = 0
    after = _dump(rigged)
    assert after != before
    with History.in_memory() as untouched:
        untouched.admit(a_drive(), a_place(), NOON)
        untouched.record(full_round(known))
        untouched.record(full_round(known, NOON + DAY, 2))
        assert [line for line in _dump(untouched) if "_sqlite_migrations" not in line] == [
            line for line in after if "_sqlite_migrations" not in line
        ]
    assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]


def test_what_a_failure_left_open_does_not_swallow_the_next_round(rigged):
    """From the n-th statement on all fail, the undoing too, until the trouble is over."""
    known = rigged.admit(a_drive(), a_place(), NOON)
    connection = rigged._db.conn
    for number, fails_at in enumerate((2, 6, 12, 20)):
        before = rigged._db.conn.execute("SELECT count(*) FROM pass").fetchone()
        connection.fails_at, connection.fails_on = fails_at, True
        with pytest.raises(HistoryError, match="rigged"):
            rigged.record(full_round(known, NOON + DAY, 99))
        connection.fails_at, connection.fails_on = 0, False
        rigged.record(full_round(known, NOON + number, number))
        with closing(sqlite3.connect(rigged._path)) as other:
            assert other.execute("SELECT count(*) FROM pass").fetchone()[0] == before[0] + 1
            assert other.execute("SELECT max(at) FROM pass").fetchone() == (NOON + number,)


def test_whichever_statement_of_the_first_start_fails_the_next_start_succeeds(folder):
    folder.mkdir()
    for fails_at in range(1, 500):
        path = folder / f"{fails_at}.db"
        connection = sqlite3.connect(path, factory=_Rigged)
        connection.fails_at = fails_at
        try:
            prepared(connection, path).close()
        except HistoryError:
            begun(path).close()
            assert _integrity(path) == [("ok",)]
        else:
            break
    assert 30 < fails_at < 500


def test_a_full_disk_is_said_and_what_was_stored_before_is_kept(folder):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        history.record(full_round(known))
        pages = history._db.conn.execute("PRAGMA page_count").fetchone()[0]
        history._db.conn.execute(f"PRAGMA max_page_count = {pages}")
        before = _dump(history)
        noise = random.Random(1)  # noqa: S311  # what cannot be packed must not be a secret, only large
        large = "".join(chr(noise.randrange(0x4E00, 0x9FFF)) for _ in range(50_000))
        with pytest.raises(
            HistoryError, match=r"history\.db cannot be written: the disk that holds it is full"
        ):
            history.record(a_round(a_part(known, state=large)))
        assert _dump(history) == before
        history._db.conn.execute("PRAGMA max_page_count = 100000")
        history.record(a_round(a_part(known, state=large)))
        assert history.states() == {known.number: large}
    assert _integrity(folder / HISTORY) == [("ok",)]


@pytest.mark.parametrize("back", [False, True])
def test_a_history_that_is_taken_away_is_noticed_before_anything_is_reported_as_stored(folder, back):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        path = folder / HISTORY
        path.rename(folder / "aside")
        if back:
            path.touch()
        with pytest.raises(HistoryError, match=r"history\.db was moved or deleted"):
            history.record(a_round(a_part(known)))
        path.unlink(missing_ok=True)
        (folder / "aside").rename(path)
        history.record(a_round(a_part(known)))
    with Past.open(folder) as past:
        assert len(past.passes(known.number)) == 1


def test_a_history_that_another_process_writes_is_held_and_its_number_named(folder):
    program = (
        "import sys; from pathlib import Path; from diskwatch.history.writer import History;"
        "h = History.open(Path(sys.argv[1])); print('open', flush=True); sys.stdin.read(); h.close()"
    )
    with subprocess.Popen(
        [sys.executable, "-c", program, str(folder)], stdin=subprocess.PIPE, stdout=subprocess.PIPE
    ) as child:
        assert child.stdout is not None
        assert child.stdout.readline() == b"open\n"
        with pytest.raises(HistoryHeld, match=f"process {child.pid}"):
            History.open(folder)
        assert watcher(folder) == child.pid
        child.communicate()
    History.open(folder).close()


def test_a_start_that_fails_lets_go_of_the_lock(folder):
    History.open(folder).close()
    path = folder / HISTORY
    good = path.read_bytes()
    path.write_bytes(good[:4096])
    with pytest.raises(HistoryError):
        History.open(folder)
    assert watcher(folder) is None
    path.write_bytes(good)
    History.open(folder).close()


def test_a_folder_that_cannot_be_made_is_told_by_name(tmp_path):
    (tmp_path / "file").touch()
    with pytest.raises(HistoryError, match="file/state"):
        History.open(tmp_path / "file" / "state")


def test_threads_take_turns_and_none_undoes_anothers_work(folder):
    troubles: list[BaseException] = []

    def note(name):
        try:
            for step in range(30):
                if step % 3:
                    history.note(Entry(at=NOON, drive=None, kind="watch", text=name))
                else:
                    with pytest.raises(HistoryError):
                        history.note(Entry(at=NOON, drive=99, kind="watch", text=name))
        except BaseException as error:  # noqa: BLE001  # a thread's failure must reach the test
            troubles.append(error)

    with History.open(folder) as history:
        threads = [threading.Thread(target=note, args=(name,)) for name in "abc"]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert troubles == []
        found = history._db.conn.execute("SELECT text, count(*) FROM day_book GROUP BY text").fetchall()
        assert found == [(name, 20) for name in "abc"]


def test_what_an_owner_tells_of_a_drive_that_nobody_knows_is_refused_whole(history):
    history.admit(a_drive("INV-1", "/dev/sda"), a_place("/dev/sda"), NOON)
    entry = Entry(at=NOON, drive=1, kind="owner", text="Told.")
    history.tell(1, {"label": "left", "asset": "A"}, NOON, entry)
    with pytest.raises(HistoryError):
        history.tell(2, {"label": "right"}, NOON, entry)
    kept = history._db.conn.execute("SELECT drive, fact, value FROM owner_fact ORDER BY fact").fetchall()
    assert kept == [(1, "asset", "A"), (1, "label", "left")]
    assert history._db.conn.execute("SELECT count(*) FROM day_book").fetchone() == (1,)


def test_only_the_upkeep_does_not_wait_for_the_disk_and_what_comes_after_it_does(history, monkeypatch):
    seen = []

    def note(connection, *_):
        seen.append(connection.execute("PRAGMA synchronous").fetchone()[0])

    def fails(connection, *_):
        note(connection)
        raise sqlite3.OperationalError("invented")

    monkeypatch.setattr(writer, "thin", note)
    monkeypatch.setattr(writer, "write_class_days", note)
    monkeypatch.setattr(writer, "write_round", note)
    history.condense(0, {})
    history.thin(NOON)
    history.record(a_round())
    monkeypatch.setattr(writer, "thin", fails)
    with pytest.raises(HistoryError):
        history.thin(NOON)
    history.record(a_round())
    normal, full = 1, 2
    assert seen == [normal, normal, full, normal, full]
