import json

import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import DiskwatchError
from diskwatch.history.later import FILE, PutOff, name_of, put_off, read
from diskwatch.records import CallWord, Identity
from diskwatch.units import DAY

NOW = 1_796_126_400
WHO = Identity(wwn="naa.5000c500a0000001", model="Borealis Tundra", serial="INVENTED-1", path="/dev/sda")
OTHER = Identity(wwn=None, model=None, serial=None, path="/dev/sdb")
WORDS = st.none() | st.sampled_from(CallWord)


def test_what_was_put_off_is_found_again_until_its_time_is_over(tmp_path):
    put = PutOff(until=NOW + DAY, call=CallWord.COPY)
    put_off(tmp_path / "mine", WHO, put, NOW)
    assert read(tmp_path / "mine", NOW + DAY - 1) == {name_of(WHO): put}
    assert read(tmp_path / "mine", NOW + DAY) == {}


def test_drives_are_put_off_side_by_side_and_what_ran_out_is_forgotten(tmp_path):
    put_off(tmp_path, WHO, PutOff(until=NOW + 10, call=CallWord.LOOK), NOW)
    put_off(tmp_path, OTHER, PutOff(until=NOW + DAY, call=None), NOW)
    assert set(read(tmp_path, NOW)) == {name_of(WHO), name_of(OTHER)}
    put_off(tmp_path, OTHER, PutOff(until=NOW + DAY, call=None), NOW + 10)
    assert set(json.loads((tmp_path / FILE).read_text())["drives"]) == {name_of(OTHER)}


@given(before=WORDS, call=WORDS, left=st.integers(-100, 100))
def test_only_a_call_that_is_no_stronger_stays_silent_and_only_in_time(before, call, left):
    put = PutOff(until=NOW + left, call=before)
    weight = {None: 1, CallWord.KEEP: 0, CallWord.LOOK: 1, CallWord.COPY: 2, CallWord.RETIRE: 3}
    assert put.silences(call, NOW) == (left > 0 and weight[call] <= weight[before])


@pytest.mark.parametrize(
    "text",
    [
        "",
        "[]",
        "{}",
        "\xff",
        '{"schema": "diskwatch/later/1", "drives": []}',
        '{"schema": "other", "drives": {}}',
    ],
)
def test_a_file_that_is_none_of_ours_puts_nothing_off(tmp_path, text):
    (tmp_path / FILE).write_text(text, encoding="latin-1")
    assert read(tmp_path, NOW) == {}


@pytest.mark.parametrize(
    "told", [None, 3, {}, {"until": "never", "call": None}, {"until": "2026-12-08", "call": "x"}]
)
def test_one_entry_that_cannot_be_right_hides_no_other(tmp_path, told):
    good = {"until": "2030-01-01T00:00:00Z", "call": "copy"}
    drives = {"bad": told, "good": good}
    (tmp_path / FILE).write_text(json.dumps({"schema": "diskwatch/later/1", "drives": drives}))
    assert set(read(tmp_path, NOW)) == {"good"}


def test_a_link_in_its_place_is_neither_followed_nor_written_through(tmp_path):
    target = tmp_path / "target"
    target.write_text("mine")
    (tmp_path / FILE).symlink_to(target)
    assert read(tmp_path, NOW) == {}
    put_off(tmp_path, WHO, PutOff(until=NOW + DAY, call=None), NOW)
    assert target.read_text() == "mine"
    assert set(read(tmp_path, NOW)) == {name_of(WHO)}


def test_a_folder_that_cannot_be_made_is_told_and_nothing_is_left_behind(tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(DiskwatchError, match="cannot be written"):
        put_off(tmp_path / "file" / "below", WHO, PutOff(until=NOW + DAY, call=None), NOW)
    assert [path.name for path in tmp_path.iterdir()] == ["file"]
