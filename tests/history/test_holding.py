import sqlite3
import subprocess
import sys

import pytest

from diskwatch.history.holding import Plain
from diskwatch.history.library import Database
from diskwatch.history.writer import History
from tests.samples import NOON


@pytest.fixture(params=["ours", "the library's"])
def held(request):
    connection = sqlite3.connect(":memory:")
    connection.execute("CREATE TABLE some (a INTEGER PRIMARY KEY)")
    made = Plain(connection) if request.param == "ours" else Database(connection, execute_plugins=False)
    yield made
    made.close()


def rows(held):
    return held.conn.execute("SELECT count(*) FROM some").fetchone()[0]


def test_what_is_done_within_a_transaction_is_done_wholly_or_not_at_all(held):
    with held.atomic():
        held.conn.execute("INSERT INTO some VALUES (1)")
        held.conn.execute("INSERT INTO some VALUES (2)")
    assert (rows(held), held.conn.in_transaction) == (2, False)

    def half():
        with held.atomic():
            held.conn.execute("INSERT INTO some VALUES (3)")
            held.conn.execute("INSERT INTO some VALUES (1)")

    with pytest.raises(sqlite3.IntegrityError):
        half()
    assert (rows(held), held.conn.in_transaction) == (2, False)


def test_what_a_failure_left_open_is_undone_and_nothing_open_is_no_fault(held):
    held.conn.execute("BEGIN")
    held.conn.execute("INSERT INTO some VALUES (9)")
    held.rollback()
    held.rollback()
    assert (rows(held), held.conn.in_transaction) == (0, False)


def test_a_history_that_has_all_steps_is_written_without_loading_the_library(tmp_path):
    History.open(tmp_path).close()
    code = (
        "import sys; from pathlib import Path; from diskwatch.history.writer import History\n"
        "from diskwatch.records import Entry\n"
        f"history = History.open(Path({str(tmp_path)!r}))\n"
        f"history.note(Entry(at={NOON}, drive=None, kind='watch', text='Here.')); history.close()\n"
        "assert 'sqlite_utils' not in sys.modules"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (0, "")
