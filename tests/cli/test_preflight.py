import sqlite3

from tests.cli.run import run, settings_for
from tests.player import lay


def test_a_machine_that_lacks_nothing_exits_0_and_stores_nothing(tmp_path):
    command = lay(tmp_path / "player", [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_sister"}])
    log = tmp_path / "kmsg"
    log.touch()
    more = f'[watch]\nonly = ["/dev/inv1"]\n[kernel_log]\nsource = "{log}"\n'
    settings = settings_for(command, tmp_path, more=more)
    ended = run("preflight", "--json", "--state", tmp_path / "state", "--settings", settings)
    assert ended.code == 0, ended.out
    assert {"name", "lacking", "text", "cure"} == set(ended.json["checks"][0])
    assert not (tmp_path / "state").exists()


def test_a_usb_bridge_that_the_tool_does_not_know_is_lacking_and_has_a_cure(tmp_path):
    drive = {"node": "/dev/inv1", "type": "", "folder": "invented_usb_bridge_unknown"}
    settings = settings_for(lay(tmp_path / "player", [drive]), tmp_path)
    ended = run("preflight", "--state", tmp_path / "state", "--settings", settings)
    assert ended.code == 4
    assert "USB adapter" in ended.out


def test_a_history_that_is_not_ours_or_of_a_newer_version_is_lacking(tmp_path):
    settings = settings_for(lay(tmp_path / "player", []), tmp_path)
    state = tmp_path / "state"
    state.mkdir()
    db = sqlite3.connect(state / "history.db")
    db.execute("PRAGMA user_version = 999")
    db.execute("CREATE TABLE other (x)")
    db.commit()
    db.close()
    ended = run("preflight", "--json", "--state", state, "--settings", settings)
    assert ended.code == 4
    assert [check["lacking"] for check in ended.json["checks"] if check["name"] == "history"] == [True]


def test_a_kernel_log_that_cannot_be_read_is_lacking_with_its_cure(tmp_path):
    command = lay(tmp_path / "player", [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_sister"}])
    more = f'[watch]\nonly = ["/dev/inv1"]\n[kernel_log]\nsource = "{tmp_path}/none"\n'
    settings = settings_for(command, tmp_path, more=more)
    ended = run("preflight", "--json", "--state", tmp_path / "state", "--settings", settings)
    assert ended.code == 4
    (told,) = [check for check in ended.json["checks"] if check["lacking"]]
    assert told["name"] == "kernel log"
    assert "source" in told["cure"]
