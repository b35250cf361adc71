import pytest

from tests.cli.run import run, settings_for
from tests.player import lay


@pytest.fixture
def state(tmp_path):
    nodes = [
        {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_failing"},
        {"node": "/dev/nvme9", "type": "nvme", "folder": "invented_nvme_worn"},
    ]
    settings = settings_for(lay(tmp_path / "player", nodes), tmp_path)
    assert run("watch", "--once", "--state", tmp_path / "state", "--settings", settings).code == 0
    return tmp_path / "state"


def test_the_json_gives_each_drive_its_chances_and_the_reason_why_failing_has_none(state):
    answer = run("outlook", "--json", "--state", state).json
    assert (answer["schema"], answer["days"]) == ("diskwatch/outlook/1", 730)
    assert len(answer["drives"]) >= 2
    for drive in answer["drives"]:
        assert drive["failure"]["chance"] is None
        assert "30 days" in drive["failure"]["reason"]
        assert all(0 <= one["chance"] <= 1 for one in drive["fresh"])
        assert drive["fresh"] or drive["model"] is None


def test_the_text_says_what_is_unknown_within_eighty_columns(state):
    told = run("outlook", "--state", state)
    assert told.code == 0
    assert told.out.count("is not known") >= 2
    assert max(map(len, told.out.splitlines())) <= 80


def test_without_a_history_there_is_nothing_to_work_on(tmp_path):
    ended = run("outlook", "--state", tmp_path / "none")
    assert (ended.code, ended.err.count("\n")) == (3, 1)
