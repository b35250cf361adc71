import errno
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.errors import HistoryGarbled, HistoryGone, HistoryUnfit
from diskwatch.history.mishaps import no_database, primary, taken_away, told, unreadable

PATH = Path("/invented/history.db")


def _raised(code: int) -> sqlite3.OperationalError:
    error = sqlite3.OperationalError("said by SQLite")
    error.sqlite_errorcode = code
    return error


@pytest.mark.parametrize(
    ("code", "says"),
    [
        (sqlite3.SQLITE_FULL, "disk that holds it is full"),
        (sqlite3.SQLITE_READONLY_DIRECTORY, "read-only"),
        (sqlite3.SQLITE_BUSY_SNAPSHOT, "locked by another process"),
        (sqlite3.SQLITE_LOCKED, "locked by another process"),
        (sqlite3.SQLITE_CORRUPT_VTAB, "is damaged"),
        (sqlite3.SQLITE_NOTADB, "not that of an SQLite database"),
        (sqlite3.SQLITE_CANTOPEN, "cannot be opened"),
        (sqlite3.SQLITE_IOERR_WRITE, "reports an error"),
    ],
)
def test_each_failure_of_sqlite_is_told_in_our_words_with_the_file(code, says):
    error = told(_raised(code), PATH)
    assert says in error.what
    assert str(PATH) in error.what
    assert error.hint
    assert "said by SQLite" not in str(error)


@pytest.mark.parametrize(
    ("number", "says"),
    [
        (errno.ENOSPC, "disk that holds it is full"),
        (errno.EROFS, "mounted read-only"),
        (errno.EACCES, "cannot be opened"),
        (errno.EIO, "reports an error"),
    ],
)
def test_failures_of_the_system_are_told_the_same_way(number, says):
    assert says in told(OSError(number, "text of the system"), PATH).what


def test_a_failure_without_a_word_of_ours_keeps_its_own():
    with closing(sqlite3.connect(":memory:")) as connection, pytest.raises(sqlite3.Error) as caught:
        connection.execute("SELECT 1 FROM nowhere")
    assert "no such table: nowhere" in str(told(caught.value, PATH))
    assert "Is a directory" in str(told(OSError(errno.EISDIR, "Is a directory"), PATH))


def test_an_error_of_pythons_own_layer_has_no_code():
    assert primary(sqlite3.ProgrammingError("closed")) is None
    assert primary(_raised(sqlite3.SQLITE_READONLY_DIRECTORY)) == sqlite3.SQLITE_READONLY


def test_a_history_in_memory_is_called_so():
    assert "the history in memory" in str(told(_raised(sqlite3.SQLITE_FULL), None))
    assert "the history in memory" in str(unreadable(None))


def test_a_path_cannot_write_to_the_terminal():
    assert "\x1b" not in str(told(_raised(sqlite3.SQLITE_FULL), Path("/in\x1b[2Jvented")))
    assert "\x1b" not in str(unreadable(Path("/in\x1b[2Jvented")))
    assert "\x1b" not in str(no_database(Path("/in\x1b[2Jvented")))
    assert "\x1b" not in str(taken_away(Path("/in\x1b[2Jvented")))


@pytest.mark.parametrize(
    ("statement", "says"),
    [
        ("INSERT INTO child VALUES (1, 7)", "speaks of a drive that is not in the history"),
        ("INSERT INTO child VALUES (2, NULL), (2, NULL)", "there is such a row already"),
        ("INSERT INTO parent VALUES (NULL, NULL)", "must be there is missing"),
        ("INSERT INTO parent VALUES (NULL, 'words')", "of the wrong kind"),
    ],
)
def test_what_does_not_fit_is_told_in_peoples_words(statement, says):
    with closing(sqlite3.connect(":memory:", isolation_level=None)) as connection:
        connection.execute("PRAGMA foreign_keys = ON")
        connection.execute("CREATE TABLE parent (number INTEGER PRIMARY KEY, size INTEGER NOT NULL) STRICT")
        connection.execute("CREATE TABLE child (number INTEGER PRIMARY KEY, drive INTEGER REFERENCES parent)")
        with pytest.raises(sqlite3.IntegrityError) as caught:
            connection.execute(statement)
    error = told(caught.value, PATH)
    assert isinstance(error, HistoryUnfit)
    assert says in error.what
    assert "constraint" not in str(error)


def test_what_cannot_be_right_and_what_was_taken_away_are_told_apart_from_other_troubles():
    garbled = unreadable(PATH, ValueError("'htd' is not a valid Kind"))
    assert isinstance(garbled, HistoryGarbled)
    assert "'htd' is not a valid Kind" in str(garbled)
    assert isinstance(taken_away(PATH), HistoryGone)
