import hashlib
import sqlite3
from contextlib import closing

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history import folding
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import Entry
from tests.history.examples import NOON, a_drive, a_place, full_round

PAGE = 4096
ROOM = folding.KEPT_BYTES // PAGE


def write_pages(history, pages):
    """A commit of about so many pages."""
    text = "x" * (PAGE - 200)
    history.note(*(Entry(at=NOON, drive=None, kind="watch", text=text) for _ in range(pages)))


def in_file(folder):
    return hashlib.sha256((folder / HISTORY).read_bytes()).hexdigest()


def log_bytes(folder):
    return (folder / f"{HISTORY}-wal").stat().st_size


@pytest.fixture
def grown(folder):
    """A history whose log is longer than is kept, and what its file was before."""
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        before = in_file(folder)
        write_pages(history, ROOM + 100)
        yield history, before


def entries_of_the_file_alone(folder):
    """What stands in the file without its log."""
    (folder / "alone").mkdir(exist_ok=True)
    alone = folder / "alone" / HISTORY
    alone.write_bytes((folder / HISTORY).read_bytes())
    with closing(sqlite3.connect(f"{alone.as_uri()}?immutable=1", uri=True)) as connection:
        return connection.execute("SELECT count(*) FROM day_book").fetchone()[0]


def test_no_round_and_no_bite_waits_until_the_file_is_written(grown, folder):
    history, before = grown
    (known,) = history.known()
    history.record(full_round(known, NOON + 1, 1))
    history.condense(0, {})
    history.thin(NOON + 2)
    assert in_file(folder) == before


def test_a_log_that_has_grown_is_folded_in_and_the_next_commit_begins_it_anew(grown, folder):
    history, _ = grown
    assert log_bytes(folder) > folding.KEPT_BYTES
    history.fold_log()
    assert entries_of_the_file_alone(folder) >= ROOM + 100
    history.thin(NOON)
    write_pages(history, 1)
    assert log_bytes(folder) == folding.KEPT_BYTES


def test_a_short_log_is_left_alone_since_folding_costs_the_disk(folder):
    with History.open(folder) as history:
        history.fold_log()
        before = in_file(folder)
        write_pages(history, ROOM - 200)
        history.fold_log()
        assert in_file(folder) == before


def test_the_log_is_folded_in_while_a_commit_is_under_way_and_neither_waits_for_the_other(grown, folder):
    history, _ = grown
    with history._writing() as connection:
        connection.execute("DELETE FROM day_book")
        history.fold_log()
        # What is not committed yet is not in it, what was committed is.
        assert entries_of_the_file_alone(folder) >= ROOM + 100
    assert history._db.conn.execute("SELECT count(*) FROM day_book").fetchone() == (0,)


def test_a_reader_keeps_the_log_long_only_as_long_as_it_looks(grown, folder):
    history, _ = grown
    with closing(sqlite3.connect(folder / HISTORY, isolation_level=None)) as reader:
        reader.execute("BEGIN")
        (seen,) = reader.execute("SELECT count(*) FROM day_book").fetchone()
        write_pages(history, 100)
        history.fold_log()
        write_pages(history, 1)
        assert log_bytes(folder) > folding.KEPT_BYTES
        assert reader.execute("SELECT count(*) FROM day_book").fetchone() == (seen,)
        reader.execute("ROLLBACK")
    history.fold_log()
    write_pages(history, 1)
    assert log_bytes(folder) == folding.KEPT_BYTES


def test_where_nobody_folds_the_log_in_a_commit_does_so_at_the_last_resort(folder):
    with History.open(folder) as history:
        before = in_file(folder)
        for _ in range(3):
            write_pages(history, folding.LAST_RESORT_PAGES // 4)
        assert in_file(folder) == before
        write_pages(history, folding.LAST_RESORT_PAGES // 3)
        assert in_file(folder) != before


def test_a_history_that_was_closed_or_taken_away_is_not_begun_anew_by_folding(grown, folder):
    history, _ = grown
    (folder / HISTORY).rename(folder / "elsewhere")
    history.fold_log()
    assert not (folder / HISTORY).exists()
    (folder / "elsewhere").rename(folder / HISTORY)
    history.close()
    log = folder / f"{HISTORY}-wal"
    log.write_bytes(bytes(folding.KEPT_BYTES + 1))
    history.fold_log()
    assert log_bytes(folder) == folding.KEPT_BYTES + 1
    log.unlink()


def test_what_keeps_the_log_from_being_folded_in_is_said(folder):
    folder.mkdir()
    with pytest.raises(HistoryError, match=HISTORY):
        folding.fold_in(folder / HISTORY)
    assert not (folder / HISTORY).exists()


def test_a_history_in_memory_has_no_log_to_fold_in():
    with History.in_memory() as history:
        write_pages(history, 10)
        history.fold_log()
        assert history._db.conn.execute("SELECT count(*) FROM day_book").fetchone() == (10,)
