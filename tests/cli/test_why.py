import pytest

from tests.cli.run import run, settings_for
from tests.player import lay


@pytest.fixture
def state(tmp_path):
    command = lay(tmp_path / "player", [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_failing"}])
    settings = settings_for(command, tmp_path)
    assert run("watch", "--once", "--state", tmp_path / "state", "--settings", settings).code == 0
    return tmp_path / "state"


def test_it_tells_the_chain_from_readings_to_the_call(state):
    told = run("why", "inv1", "--state", state)
    assert told.code == 0
    for part in (
        "Call: retire",
        "What stands:",
        "Counters followed",
        "Evidence",
        "Cause: the table's rows",
        "What became of other drives",
        "Margin:",
        "Rule that decided:",
        "What would change the call:",
    ):
        assert part in told.out
    assert max(map(len, told.out.splitlines())) <= 80


def test_beside_each_finding_stands_a_line_for_experts_the_same_as_in_the_json(state):
    found = run("why", "inv1", "--json", "--state", state).json["findings"]
    told = " ".join(run("why", "inv1", "--state", state).out.split())
    assert found
    for one in found:
        assert one["expert"].startswith(f"{one['name']}/")
        assert f"For experts: {one['expert']}" in told


def test_the_json_names_rule_counters_evidence_and_damage(state):
    answer = run("why", "inv1", "--json", "--state", state).json
    assert answer["drive"]["call"] == "retire"
    assert answer["rule"].startswith("fact:")
    assert answer["rule_told"].startswith(answer["rule"])
    assert answer["drive"]["odds"] is None
    assert answer["drive"]["odds_reason"]
    assert answer["drive"]["margin_reason"]
    assert sum(answer["cause_table"]["posterior"].values()) == pytest.approx(1)
    assert {"sign", "showed", "probabilities", "sources"} <= answer["cause_table"]["rows"][0].keys()
    assert {one["stream"] for one in answer["evidence"]} >= {"media", "link"}
    assert answer["damage"]["copy_at"] == 7


def test_a_drive_that_nobody_knows_is_wrong_usage_and_its_error_one_line(state):
    ended = run("why", "nobody", "--state", state)
    assert (ended.code, ended.err.count("\n")) == (2, 1)
