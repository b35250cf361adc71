import pytest

from diskwatch.cli import laying
from tests.cli.test_install import Machine, wheels


@pytest.fixture
def machine(tmp_path, monkeypatch):
    made = Machine(tmp_path, monkeypatch, own=False)
    made.main(["install", "--wheels", str(wheels(tmp_path))])
    made.layout.history.mkdir(parents=True)
    (made.layout.history / "history.db").write_text("ten years")
    made.asked()
    return made


def test_it_takes_all_away_but_the_history(machine, capsys):
    assert machine.main(["uninstall"]) == 0
    assert machine.asked() == [
        "--global disable diskwatch-notify.service",
        "disable --now diskwatch.service diskwatch-notify.service",
        "daemon-reload",
    ]
    assert not machine.layout.venv.exists()
    assert not machine.layout.link.is_symlink()
    assert not any(path.exists() for path in machine.layout.units.values())
    assert (machine.layout.history / "history.db").read_text() == "ten years"
    assert "settings stay" in capsys.readouterr().out


def test_twice_is_no_harm_and_says_so(machine, capsys):
    machine.main(["uninstall"])
    machine.asked()
    assert machine.main(["uninstall"]) == 0
    assert machine.asked() == []
    assert "nothing to take away" in capsys.readouterr().out


def test_a_dry_run_takes_nothing_away(machine):
    assert machine.main(["uninstall", "--dry-run"]) == 0
    assert machine.asked() == []
    assert machine.layout.venv.exists()
    assert machine.layout.units[laying.WATCH].exists()


def test_a_folder_that_is_no_environment_is_left_alone(machine):
    (machine.layout.venv / "pyvenv.cfg").unlink()
    machine.main(["uninstall"])
    assert machine.layout.venv.exists()


def test_a_user_may_not_take_away_what_is_everybodys(machine, monkeypatch, capsys):
    monkeypatch.setattr("os.geteuid", lambda: 1000)
    assert machine.main(["uninstall"]) == 4
    assert "root alone" in capsys.readouterr().err
    assert machine.layout.venv.exists()
