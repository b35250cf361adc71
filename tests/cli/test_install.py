import os
import sys
from pathlib import Path

import pytest

from diskwatch.cli import laying, main
from tests.cli.run import run

FAKE = """#!{python}
import pathlib, sys
with open({log!r}, "a") as log:
    log.write(" ".join(sys.argv[1:]) + "\\n")
if sys.argv[1:3] == ["-m", "venv"]:
    made = pathlib.Path(sys.argv[3])
    (made / "bin").mkdir(parents=True)
    (made / "pyvenv.cfg").touch()
    (made / "bin" / "python").write_text(pathlib.Path(__file__).read_text())
    (made / "bin" / "python").chmod(0o755)
"""


class Machine:
    """A machine with a Python and a systemctl that only write down what they are asked; installs in-process."""

    def __init__(self, folder, monkeypatch, *, own):
        self.main, self.log = main, folder / "log"
        self.layout = laying.user(folder) if own else laying.system(folder)
        tools = folder / "tools"
        tools.mkdir()
        for name in ("python", "systemctl"):
            (tools / name).write_text(FAKE.format(python=sys.executable, log=str(self.log)))
            (tools / name).chmod(0o755)
        monkeypatch.setenv("PATH", f"{tools}:{os.environ['PATH']}")
        monkeypatch.setattr("sys.executable", str(tools / "python"))
        monkeypatch.setattr("os.geteuid", lambda: 1000 if own else 0)
        monkeypatch.setattr(laying, "chosen", lambda **_: self.layout)
        monkeypatch.setattr(laying, "system", lambda: laying.Layout(
            own=False, venv=folder, link=folder, history=folder,
            units={laying.WATCH: folder / "etc/systemd/system" / laying.WATCH},
        ))  # fmt: skip
        monkeypatch.setattr(laying, "systemd_runs", lambda: True)

    def asked(self):
        found = self.log.read_text().splitlines() if self.log.exists() else []
        self.log.unlink(missing_ok=True)
        return found


@pytest.fixture
def machine(tmp_path, monkeypatch):
    return Machine(tmp_path, monkeypatch, own=False)


def wheels(tmp_path):
    folder = tmp_path / "wheels"
    folder.mkdir()
    (folder / "diskwatch-0.1.0-py3-none-any.whl").touch()
    return folder


def test_it_lays_environment_command_and_units_and_starts_them(machine, tmp_path, capsys):
    assert machine.main(["install", "--wheels", str(wheels(tmp_path))]) == 0
    asked = machine.asked()
    assert asked[0].startswith("-m venv ")
    assert all("--no-index" in line for line in asked if "pip install" in line)
    assert asked[-4:] == [
        "daemon-reload",
        "--global enable diskwatch-notify.service",
        "enable diskwatch.service diskwatch-notify.service",
        "restart diskwatch.service diskwatch-notify.service",
    ]
    assert machine.layout.link.readlink() == machine.layout.program
    for path in machine.layout.units.values():
        assert f"ExecStart={machine.layout.program} " in path.read_text()
    assert "the history lies in" in capsys.readouterr().out


def test_twice_is_no_harm_and_says_what_is_there_already(machine, tmp_path, capsys):
    folder = wheels(tmp_path)
    machine.main(["install", "--wheels", str(folder)])
    before = {path: path.read_text() for path in machine.layout.units.values()}
    machine.asked()
    capsys.readouterr()
    assert machine.main(["install", "--wheels", str(folder)]) == 0
    assert not [line for line in machine.asked() if line.startswith("-m venv")]
    assert {path: path.read_text() for path in before} == before
    assert capsys.readouterr().out.count("is there already") == 2 + len(before)


def test_a_dry_run_says_all_and_does_nothing(machine, tmp_path, capsys):
    assert machine.main(["install", "--dry-run", "--wheels", str(wheels(tmp_path))]) == 0
    assert machine.asked() == []
    assert not machine.layout.venv.exists()
    assert not machine.layout.units[laying.WATCH].exists()
    assert capsys.readouterr().out.count("would ") >= 8


def test_a_command_of_somebody_elses_is_left_alone(machine, tmp_path, capsys):
    machine.layout.link.parent.mkdir(parents=True)
    machine.layout.link.write_text("theirs")
    machine.main(["install", "--wheels", str(wheels(tmp_path))])
    assert machine.layout.link.read_text() == "theirs"
    assert "somebody else's" in capsys.readouterr().out


@pytest.mark.parametrize("shared", [False, True])
def test_a_users_own_watch_is_laid_only_where_nobody_watches_for_all(tmp_path, monkeypatch, shared):
    machine = Machine(tmp_path, monkeypatch, own=True)
    if shared:
        path = tmp_path / "etc/systemd/system" / laying.WATCH
        path.parent.mkdir(parents=True)
        path.touch()
    assert machine.main(["install", "--user", "--wheels", str(wheels(tmp_path))]) == 0
    assert machine.layout.units[f"user/{laying.WATCH}"].exists() is not shared
    wanted = "diskwatch-notify.service" if shared else "diskwatch.service diskwatch-notify.service"
    assert machine.asked()[-1] == f"--user restart {wanted}"


def test_without_systemd_the_units_are_laid_and_nothing_is_started(machine, tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(laying, "systemd_runs", lambda: False)
    assert machine.main(["install", "--wheels", str(wheels(tmp_path))]) == 0
    assert not [line for line in machine.asked() if "restart" in line]
    assert "nothing was started" in capsys.readouterr().out


def test_a_folder_without_wheels_is_wrong_usage(tmp_path):
    ended = run("install", "--dry-run", "--wheels", tmp_path)
    assert (ended.code, ended.out) == (2, "")
    assert "holds no wheel" in ended.err


def test_root_alone_may_lay_it_for_all(machine, monkeypatch, capsys):
    monkeypatch.setattr("os.geteuid", lambda: 1000)
    assert machine.main(["install"]) == 4
    assert machine.asked() == []
    assert "root alone" in capsys.readouterr().err


def test_a_real_dry_run_names_the_real_places():
    ended = run("install", "--dry-run")
    assert ended.code == 0
    assert str(Path("/etc/systemd/system/diskwatch.service")) in ended.out
