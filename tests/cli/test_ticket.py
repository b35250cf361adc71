import json
import os
import platform

import pytest
from jsonschema import Draft202012Validator

from tests.cli.run import run, settings_for
from tests.player import lay


@pytest.fixture(scope="module")
def state(tmp_path_factory):
    base = tmp_path_factory.mktemp("ticket")
    nodes = [
        {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_failing"},
        {"node": "/dev/inv2", "type": "nvme", "folder": "invented_nvme_worn"},
    ]
    settings = settings_for(lay(base / "player", nodes), base)
    assert run("watch", "--once", "--state", base / "state", "--settings", settings).code == 0
    return base / "state"


def test_a_ticket_is_json_by_the_schema_that_ships_and_passes_its_own_check(state, tmp_path):
    made = run("ticket", "inv1", "--state", state)
    assert made.code == 0
    ticket = made.json
    schema = run("ticket", "--schema").json
    assert [error.message for error in Draft202012Validator(schema).iter_errors(ticket)] == []
    assert ticket["call"]["word"] == "retire"
    assert ticket["machine"]["kernel"] == platform.release()
    assert ticket["settings"]["readings_every_seconds"] == 1_800
    assert "smartctl" in ticket["answer"]["text"]
    path = tmp_path / "ticket.json"
    path.write_text(made.out, encoding="utf-8")
    assert run("ticket-check", path).code == 0


def test_the_page_is_text_of_72_columns(state):
    made = run("ticket", "inv1", "--text", "--state", state)
    assert made.code == 0
    assert max(map(len, made.out.splitlines())) <= 72
    assert len(made.out.splitlines()) <= 60
    assert "Please replace this drive" in made.out


def test_all_drives_are_told_in_a_list(state, tmp_path):
    made = run("ticket", "--all", "--state", state)
    # Besides these the machine that runs the test may have disks of its own.
    assert {one["drive"]["device"] for one in made.json} >= {"/dev/inv1", "/dev/inv2"}
    path = tmp_path / "tickets.json"
    path.write_text(made.out, encoding="utf-8")
    assert run("ticket-check", path).code == 0
    assert "\f" in run("ticket", "--all", "--text", "--state", state).out


def test_what_is_hidden_stands_nowhere(state):
    clear = run("ticket", "inv1", "--state", state).json
    made = run("ticket", "inv1", "--hide", "serial,host,paths", "--state", state)
    for name in (clear["drive"]["serial"], clear["drive"]["wwn"], platform.node()):
        assert name
        assert name not in made.out
    assert {one["kind"] for one in made.json["hidden"]} == {"serial", "host", "paths"}


def test_a_file_is_written_and_not_written_over_unforced(state, tmp_path):
    path = tmp_path / "one.json"
    assert run("ticket", "inv1", "-o", path, "--state", state).code == 0
    before = path.read_bytes()
    again = run("ticket", "inv2", "-o", path, "--state", state)
    assert (again.code, again.err.count("\n"), path.read_bytes()) == (2, 1, before)
    assert "--force" in again.err
    assert run("ticket", "inv2", "-o", path, "--force", "--state", state).code == 0
    assert json.loads(path.read_text())["drive"]["device"] == "/dev/inv2"
    assert run("ticket", "inv2", "-o", tmp_path / "no" / "one.json", "--state", state).code == 4


@pytest.mark.parametrize(
    "words",
    [(), ("nobody",), ("inv1", "--all"), ("inv1", "--hide", "model"), ("inv1", "--since", "never")],
    ids=str,
)
def test_wrong_usage_is_told_in_one_line(state, words):
    ended = run("ticket", *words, "--state", state)
    assert (ended.code, ended.err.count("\n"), ended.out) == (2, 1, "")


def test_without_a_history_there_is_nothing_to_work_on(tmp_path):
    assert run("ticket", "--state", tmp_path).code == 3


def test_the_only_drive_need_not_be_named(tmp_path):
    command = lay(tmp_path / "player", [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_cable"}])
    settings = settings_for(command, tmp_path, more='[watch]\nonly = ["/dev/inv1"]\n')
    assert run("watch", "--once", "--state", tmp_path / "state", "--settings", settings).code == 0
    assert run("ticket", "--state", tmp_path / "state").json["drive"]["device"] == "/dev/inv1"
    wrong = tmp_path / "wrong.toml"
    wrong.write_text("[smart]\nevery = 5\n")
    ended = run("ticket", "--state", tmp_path / "state", "--settings", wrong)
    assert ended.code == 2
    assert os.fspath(wrong) in ended.err
