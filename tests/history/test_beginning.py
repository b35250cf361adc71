from contextlib import closing

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history.beginning import begun, make_file, make_folder
from diskwatch.history.versions import Age, age
from diskwatch.places import HISTORY


def test_what_is_begun_is_of_this_version_and_keeps_to_its_rules(tmp_path):
    path = tmp_path / HISTORY
    with closing(begun(path)) as db:
        assert age(db.conn, path) is Age.CURRENT
        kept = {
            name: db.conn.execute(f"PRAGMA {name}").fetchone()[0]
            for name in ("journal_mode", "foreign_keys", "synchronous")
        }
    assert kept == {"journal_mode": "wal", "foreign_keys": 1, "synchronous": 2}


def test_folder_and_file_that_are_there_are_left_as_they_are(tmp_path):
    tmp_path.chmod(0o700)
    path = tmp_path / HISTORY
    path.write_bytes(b"there already")
    make_folder(tmp_path)
    make_file(path)
    assert tmp_path.stat().st_mode & 0o777 == 0o700
    assert path.read_bytes() == b"there already"


def test_what_cannot_be_made_is_named(tmp_path):
    (tmp_path / "file").touch()
    with pytest.raises(HistoryError, match="file/state"):
        make_folder(tmp_path / "file" / "state")
    with pytest.raises(HistoryError, match="nowhere"):
        make_file(tmp_path / "nowhere" / HISTORY)
