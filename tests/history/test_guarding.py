import os
import socket

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history.guarding import open_plain, refuse_odd, refuse_odd_database
from diskwatch.places import HISTORY

OTHER = 65534
only_root = pytest.mark.skipif(os.geteuid() != 0, reason="only root can give files to other users")


def _lay(path, sort):
    if sort == "link":
        path.symlink_to(path.parent / "victim")
    elif sort == "pipe":
        os.mkfifo(path)
    elif sort == "socket":
        with socket.socket(socket.AF_UNIX) as one:
            one.bind(str(path))
    else:
        path.mkdir()


SORTS = {"link": "a symbolic link", "pipe": "a pipe", "socket": "a socket", "folder": "a folder"}


@pytest.mark.parametrize("sort", SORTS)
@pytest.mark.parametrize("flags", [os.O_RDONLY, os.O_WRONLY, os.O_RDWR | os.O_CREAT])
def test_what_is_no_plain_file_is_not_opened_and_called_by_its_name(tmp_path, sort, flags):
    _lay(tmp_path / "name", sort)
    with pytest.raises(HistoryError, match=f"name is {SORTS[sort]} and no plain file"):
        open_plain(tmp_path / "name", flags)
    assert not (tmp_path / "victim").exists()


@pytest.mark.parametrize("sort", SORTS)
@pytest.mark.parametrize("beside", ["", "-wal", "-shm", "-journal"])
@pytest.mark.parametrize("to_write", [False, True])
def test_a_database_that_is_no_plain_file_or_has_none_beside_it_is_refused(tmp_path, sort, beside, to_write):
    _lay(tmp_path / f"{HISTORY}{beside}", sort)
    with pytest.raises(HistoryError, match=SORTS[sort]):
        refuse_odd_database(tmp_path / HISTORY, to_write=to_write)


def test_plain_files_and_nothing_at_all_are_not_refused(tmp_path):
    for path in (tmp_path / "nowhere" / HISTORY, tmp_path / HISTORY):
        refuse_odd(path)
        refuse_odd_database(path, to_write=True)
    (tmp_path / HISTORY).touch()
    refuse_odd(tmp_path / HISTORY)
    refuse_odd_database(tmp_path / HISTORY, to_write=True)
    os.close(open_plain(tmp_path / HISTORY, os.O_RDWR))


def test_what_cannot_be_opened_for_another_reason_says_it(tmp_path):
    with pytest.raises(FileNotFoundError):
        open_plain(tmp_path / "name", os.O_RDONLY)


@only_root
def test_a_file_of_another_user_is_read_but_not_written(tmp_path):
    path = tmp_path / HISTORY
    path.touch()
    os.chown(path, OTHER, OTHER)
    refuse_odd_database(path, to_write=False)
    with pytest.raises(HistoryError, match=r"history\.db belongs to user \w+.*run as that user"):
        refuse_odd_database(path, to_write=True)
    with pytest.raises(HistoryError, match="belongs to user"):
        open_plain(path, os.O_RDWR)


@only_root
def test_root_writes_nothing_in_the_folder_of_another_user(tmp_path):
    os.chown(tmp_path, 4_000_000, OTHER)
    refuse_odd_database(tmp_path / HISTORY, to_write=False)
    with pytest.raises(HistoryError, match="belongs to user number 4000000"):
        refuse_odd_database(tmp_path / HISTORY, to_write=True)
    os.chown(tmp_path, 0, 0)
