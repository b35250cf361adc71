import sqlite3

import pytest

from diskwatch.history import schema, versions
from diskwatch.history.library import Database, Migrations


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


def test_every_table_of_ours_checks_types(db):
    schema.bring_up_to_date(db)
    loose = db.execute(
        "SELECT name FROM pragma_table_list WHERE schema = 'main' AND type = 'table' AND NOT strict"
        " AND name NOT LIKE 'sqlite_%' AND name <> '_sqlite_migrations'"
    ).fetchall()
    assert loose == []
