import runpy
import shutil
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history import schema, versions
from diskwatch.history.library import Database, Migrations
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from tests.history.examples import DAY, NOON

OLD = Path(__file__).parents[2] / "fixtures" / "history"


@pytest.fixture
def db():
    found = Database(memory=True)
    yield found
    found.close()


def _dump(db: Database) -> list[str]:
    return list(db.conn.iterdump())


def test_the_steps_are_those_that_readers_know_in_the_same_order(db):
    assert tuple(step.name for step in schema.steps.pending(db)) == versions.MIGRATIONS


def test_a_history_brought_up_to_date_carries_the_number_of_its_steps(db):
    schema.bring_up_to_date(db)
    assert db.execute("PRAGMA user_version").fetchone() == (len(versions.MIGRATIONS),)
    assert schema.steps.pending(db) == []


def test_bringing_it_up_to_date_again_changes_nothing(db):
    schema.bring_up_to_date(db)
    before = _dump(db)
    schema.bring_up_to_date(db)
    assert _dump(db) == before


def test_a_step_that_fails_leaves_the_history_as_it_was(db, monkeypatch):
    schema.bring_up_to_date(db)
    before = _dump(db)
    failing = Migrations(versions.MIGRATION_SET)

    @failing(name="9999_invented")
    def _fails(db):
        db.conn.execute("CREATE TABLE half (x INTEGER) STRICT")
        db.conn.execute("INSERT INTO half VALUES ('no number')")

    monkeypatch.setattr(schema, "steps", failing)
    with pytest.raises(sqlite3.IntegrityError):
        schema.bring_up_to_date(db)
    assert _dump(db) == before


@pytest.fixture
def old(folder):
    """A history as the first version had it, in its place."""
    folder.mkdir()
    shutil.copyfile(OLD / "0001.db", folder / HISTORY)
    return folder


def test_every_older_version_is_kept_as_a_file_and_its_script_still_makes_it(tmp_path):
    kept = sorted(path.stem for path in OLD.glob("*.db"))
    assert kept == [name[:4] for name in versions.MIGRATIONS[:-1]]
    for name in kept:
        runpy.run_path(str(OLD / f"make_{name}.py"))["make"](tmp_path / "made.db")
        with (
            closing(sqlite3.connect(tmp_path / "made.db")) as made,
            closing(sqlite3.connect(OLD / f"{name}.db")) as there,
        ):
            assert list(made.iterdump()) == list(there.iterdump())


def test_a_history_of_the_first_version_comes_over_whole(old):
    with History.open(old) as history:
        assert history.states() == {1: '{"parameters":1}'}
    with Past.open(old) as past:
        (line,) = past.bays(NOON).drives
        assert (line.label, line.call.word if line.call else None, len(line.findings)) == ("attic", "look", 1)
        assert past.series(1, "pending-sectors") == ((NOON, 0), (NOON + DAY, 8))
        assert past.series(1, "data-written") == ((NOON + DAY, 2**70),)
        assert [one.outcome for one in past.passes(1)] == ["timed-out", "read"]
        assert [one.passes for one in past.pass_days(1)] == [1, 1]
        assert past.evidence(1, "pending-sectors") == ((NOON // DAY, 1.5), (NOON // DAY + 1, 4000.5))
        assert len(past.traffic(1, 0, 2**40)) == 7
        rollups = past.rollups(1, 0, 2**40)
        assert [(one.at, one.covered_ms, one.counts.writes) for one in rollups] == [
            (NOON + 300, 300_000, 100),
            (NOON + 600, 120_000, 40),
        ]
        assert {(one.longest_read_us, one.reset) for one in rollups} == {(None, False)}
        assert [entry.kind for entry in past.day_book()] == ["rise"]
        reading = past.last_reading(1)
        assert reading is not None
        assert reading.warning_celsius == 60


@pytest.mark.parametrize("step", versions.MIGRATIONS[1:])
def test_whichever_statement_of_a_step_fails_the_old_file_stays_as_it_was(old, monkeypatch, step):
    path = old / HISTORY
    with closing(sqlite3.connect(path)) as before:
        dump = list(before.iterdump())
    sound = schema.STATEMENTS[step]
    for count in range(len(sound)):
        with monkeypatch.context() as patch:
            patch.setitem(schema.STATEMENTS, step, (*sound[:count], "CREATE TABLE no words"))
            with pytest.raises(HistoryError):
                History.open(old)
        with closing(sqlite3.connect(path)) as after:
            assert list(after.iterdump()) == dump
    History.open(old).close()
    with Past.open(old) as past:
        assert len(past.rollups(1, 0, 2**40)) == 2


def test_every_table_of_ours_checks_types(db):
    schema.bring_up_to_date(db)
    loose = db.execute(
        "SELECT name FROM pragma_table_list WHERE schema = 'main' AND type = 'table' AND NOT strict"
        " AND name NOT LIKE 'sqlite_%' AND name <> '_sqlite_migrations'"
    ).fetchall()
    assert loose == []
