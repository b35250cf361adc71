import shutil
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.history import older, versions
from diskwatch.history.library import Database
from diskwatch.history.older import read_as_current
from diskwatch.history.schema import bring_up_to_date

OLD = sorted((Path(__file__).parents[2] / "fixtures" / "history").glob("*.db"))


@pytest.mark.parametrize("path", OLD, ids=lambda path: path.stem)
def test_every_table_reads_as_the_steps_will_make_it(tmp_path, path):
    shutil.copyfile(path, tmp_path / "later.db")
    later = Database(tmp_path / "later.db")
    bring_up_to_date(later)
    with closing(sqlite3.connect(f"{path.as_uri()}?mode=ro&immutable=1", uri=True)) as now:
        assert read_as_current(now)
        tables = [
            name
            for (name,) in later.conn.execute(
                "SELECT name FROM pragma_table_list WHERE schema = 'main' AND strict"
            )
        ]
        assert len(tables) > 15
        for table in tables:
            columns = [
                name for (name,) in later.conn.execute("SELECT name FROM pragma_table_xinfo(?)", (table,))
            ]
            sql = f"SELECT {', '.join(columns)} FROM {table}"  # noqa: S608  # names of our own schema
            assert sorted(map(repr, now.execute(sql))) == sorted(map(repr, later.conn.execute(sql))), table
    later.close()


def test_every_step_that_a_file_may_lack_has_something_to_stand_in_for_it():
    assert older._VIEWS.keys() == set(versions.MIGRATIONS[1:])


def test_a_step_that_nothing_stands_in_for_is_told_and_nothing_is_made(monkeypatch):
    with closing(sqlite3.connect(f"{OLD[0].as_uri()}?mode=ro&immutable=1", uri=True)) as now:
        monkeypatch.setattr(versions, "MIGRATIONS", (*versions.MIGRATIONS, "9999_invented"))
        assert not read_as_current(now)
        assert now.execute("SELECT count(*) FROM sqlite_temp_master").fetchone() == (0,)
