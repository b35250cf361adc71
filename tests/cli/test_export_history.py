import json

import pytest

from diskwatch.cli.export_history import _put
from diskwatch.errors import DiskwatchError
from diskwatch.history.exchange import read
from tests.cli.run import run
from tests.cli.test_watch import GOOD, once


def test_the_past_of_all_drives_or_of_one_goes_to_a_file_or_to_standard_output(tmp_path):
    ended, _ = once(tmp_path, [GOOD, {"node": "/dev/inv2", "type": "nvme", "folder": "invented_nvme_json"}])
    assert ended.code == 0
    state = tmp_path / "state"
    everything = run("export-history", "--state", state)
    assert everything.code == 0
    assert everything.json["schema"] == "diskwatch/history/1"
    lines, wrong = read(everything.out)
    assert wrong == ()
    assert {line.fields["device"] for line in lines if line.record == "drive"} >= {"/dev/inv1", "/dev/inv2"}
    file = tmp_path / "past.csv"
    one = run("export-history", "--drive", "inv1", "--format", "csv", "-o", file, "--state", state)
    assert (one.code, one.out) == (0, "")
    assert f"the past of one drive is in {file}" in one.err
    lines, wrong = read(file.read_text())
    assert wrong == ()
    assert [line.fields["device"] for line in lines if line.record == "drive"] == ["/dev/inv1"]


def test_where_there_is_no_history_or_no_such_drive_it_says_so(tmp_path):
    assert run("export-history", "--state", tmp_path / "none").code == 3
    once(tmp_path, [GOOD])
    ended = run("export-history", "--drive", "nothing", "--state", tmp_path / "state")
    assert (ended.code, ended.out) == (2, "")
    assert "no drive is called nothing" in ended.err


def test_a_file_that_cannot_be_written_is_named_and_what_was_there_stays(tmp_path):
    once(tmp_path, [GOOD])
    ended = run("export-history", "-o", tmp_path / "no" / "file", "--state", tmp_path / "state")
    assert ended.code == 4
    assert "no/file cannot be written" in ended.err
    there = tmp_path / "there"
    there.mkdir()
    with pytest.raises(DiskwatchError, match="there cannot be written"):
        _put(there, ["text"])
    assert list(tmp_path.glob(".there*")) == []


def test_json_is_strict(tmp_path):
    once(tmp_path, [GOOD])

    def refuse(word):
        raise AssertionError(word)

    json.loads(run("export-history", "--state", tmp_path / "state").out, parse_constant=refuse)
