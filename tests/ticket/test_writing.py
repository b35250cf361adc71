import json
import os

import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.ticket.writing import put, text_of
from diskwatch.units import is_active


@given(st.text(st.characters(exclude_categories=["Cs"])))
def test_whatever_stands_in_it_the_text_is_json_on_which_no_terminal_acts(words):
    text = text_of({"words": words})
    assert json.loads(text) == {"words": words}
    assert not any(is_active(letter) for letter in text)


def test_a_file_is_put_in_place_whole(tmp_path):
    put(tmp_path / "one.json", "all of it", force=False)
    assert (tmp_path / "one.json").read_text() == "all of it"
    assert [one.name for one in tmp_path.iterdir()] == ["one.json"]


@pytest.mark.parametrize("make", [lambda path: path.write_text("old"), lambda path: path.symlink_to("nowhere")])
def test_what_is_there_is_not_written_over_unless_that_is_asked_for(tmp_path, make):
    path = tmp_path / "one.json"
    make(path)
    with pytest.raises(UsageError, match="is there already"):
        put(path, "new", force=False)
    assert path.is_symlink() or path.read_text() == "old"
    put(path, "new", force=True)
    assert path.read_text() == "new"
    assert [one.name for one in tmp_path.iterdir()] == ["one.json"]


def test_a_file_that_came_in_between_is_not_written_over(tmp_path, monkeypatch):
    path = tmp_path / "one.json"
    monkeypatch.setattr(os.path, "lexists", lambda _path: False)
    path.write_text("came in between")
    with pytest.raises(UsageError, match="is there already"):
        put(path, "new", force=False)
    assert path.read_text() == "came in between"


@pytest.mark.parametrize("name", ["missing/one.json", "one.json/two.json"])
def test_where_it_cannot_be_written_nothing_is_left_behind(tmp_path, name):
    (tmp_path / "one.json").write_text("old")
    with pytest.raises(DiskwatchError, match="cannot be written"):
        put(tmp_path / name, "new", force=True)
    assert [one.name for one in tmp_path.iterdir()] == ["one.json"]


def test_a_folder_is_never_replaced(tmp_path):
    with pytest.raises(UsageError):
        put(tmp_path, "new", force=True)
