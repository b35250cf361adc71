import os

import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import DiskwatchError
from diskwatch.notices.memory import FILE, Bubble, Failure, Memory, keep, read
from diskwatch.notices.policy import State, Told
from diskwatch.records import CallWord
from tests.samples import NOON

SOME = (
    Memory()
    .told("desktop", State(drives={"A 1": Told(call=CallWord.COPY, at=NOON)}, trouble_at=NOON))
    .told("command", State(calm_at=NOON))
    .shown("A 1", Bubble(place="bus/:1.2", number=7))
    .failed("command", Failure(at=NOON, text="it ended with 1"))
)


def test_what_is_remembered_comes_back_whole_and_only_the_user_may_read_it(tmp_path):
    keep(tmp_path / "own", SOME)
    assert read(tmp_path / "own") == SOME
    assert (tmp_path / "own" / FILE).stat().st_mode & 0o777 == 0o600
    assert [path.name for path in (tmp_path / "own").iterdir()] == [FILE]


def test_ways_know_nothing_of_each_other():
    assert SOME.of("desktop").calm_at is None
    assert SOME.of("other") == State()


@pytest.mark.parametrize(
    "text", ["", "{", "[]", '{"schema": "other/9"}', '{"ways": {"desktop": {"drives": {"a": {"call": "no"}}}}}']
)
def test_a_file_that_is_none_of_ours_counts_as_an_empty_one(tmp_path, text):
    (tmp_path / FILE).write_text(text)
    assert read(tmp_path) == Memory()


def test_a_link_in_the_files_place_is_not_followed(tmp_path):
    keep(tmp_path / "other", SOME)
    (tmp_path / FILE).symlink_to(tmp_path / "other" / FILE)
    assert read(tmp_path) == Memory()


def test_a_folder_that_cannot_be_written_is_told_in_one_line(tmp_path):
    (tmp_path / "own").write_text("in the way")
    with pytest.raises(DiskwatchError, match=r"notices\.json cannot be written"):
        keep(tmp_path / "own", SOME)


@given(st.binary(max_size=300))
def test_no_bytes_break_the_reader(tmp_path_factory, content):
    folder = tmp_path_factory.mktemp("own")
    (folder / FILE).write_bytes(content)
    assert isinstance(read(folder), Memory)


def test_a_write_that_is_cut_short_leaves_what_was_there(tmp_path, monkeypatch):
    keep(tmp_path, SOME)

    def refuse(_descriptor):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", refuse)
    with pytest.raises(DiskwatchError, match="No space left"):
        keep(tmp_path, Memory())
    assert read(tmp_path) == SOME
