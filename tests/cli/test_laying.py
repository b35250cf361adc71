import configparser
import re
from pathlib import Path

import pytest

from diskwatch.cli.laying import PROGRAM, Steps, system, unit, user, write
from diskwatch.errors import DiskwatchError

ROOT = Path(__file__).resolve().parents[2]
UNITS = sorted((ROOT / "systemd").rglob("*.service"))
LAYOUTS = [system(), user(Path("/home/person"))]


def names(path):
    return str(path.relative_to(ROOT / "systemd"))


@pytest.mark.parametrize("layout", LAYOUTS, ids=["system", "user"])
def test_every_unit_names_the_program_where_it_is_laid(layout):
    assert layout.units
    for name in layout.units:
        text = unit(name, layout)
        assert f"ExecStart={layout.program} " in text
        assert layout.own or PROGRAM in text
        assert not layout.own or PROGRAM not in text


def test_every_unit_of_the_repository_is_laid_by_one_layout():
    assert {names(path) for path in UNITS} == {name for layout in LAYOUTS for name in layout.units}


@pytest.mark.parametrize("path", UNITS, ids=names)
def test_a_unit_has_its_sections_and_commands_that_exist(path):
    parser = configparser.ConfigParser(strict=False, interpolation=None)
    parser.optionxform = str  # type: ignore[method-assign,assignment]  # systemd's keys have capitals
    parser.read_string(path.read_text())
    assert parser.sections() == ["Unit", "Service", "Install"]
    words = re.fullmatch(rf"{PROGRAM} (\w+)( --.*)?", parser["Service"]["ExecStart"])
    assert words is not None
    assert words[1] in {"watch", "notify"}


def test_the_service_may_use_no_network_and_only_the_powers_that_smartctl_and_the_kernels_log_need():
    text = (ROOT / "systemd" / "diskwatch.service").read_text()
    assert "PrivateNetwork=yes" in text
    assert "CapabilityBoundingSet=CAP_SYS_RAWIO CAP_SYS_ADMIN CAP_SYSLOG\n" in text
    assert "ProtectHome=read-only" in text
    assert "DevicePolicy=closed" in text


def test_a_dry_step_is_said_and_not_done_and_a_wet_one_is_both(tmp_path):
    said: list[str] = []
    Steps(said.append, dry=True).do("lay it", lambda: write(tmp_path / "a" / "unit", "text"))
    assert not (tmp_path / "a").exists()
    Steps(said.append, dry=False).do("lay it", lambda: write(tmp_path / "a" / "unit", "text"))
    assert (tmp_path / "a" / "unit").read_text() == "text"
    assert (tmp_path / "a" / "unit").stat().st_mode & 0o777 == 0o644
    assert said == ["would lay it", "lay it"]


@pytest.mark.parametrize(
    ("command", "told"),
    [
        (["sh", "-c", "echo first; echo 'no \x1b[31mroom' >&2; exit 3"], r"could not do it: no \\x1b\[31mroom"),
        (["sh", "-c", "exit 3"], "could not do it: it ended with 3"),
        (["no-such-program"], "could not do it: there is no no-such-program here"),
    ],
)
def test_a_command_that_fails_is_one_clear_line(command, told):
    with pytest.raises(DiskwatchError, match=told):
        Steps(lambda _text: None, dry=False).run("do it", command)


def test_a_place_that_cannot_be_written_is_one_clear_line(tmp_path):
    (tmp_path / "a").write_text("in the way")
    with pytest.raises(DiskwatchError, match="could not lay it: "):
        Steps(lambda _text: None, dry=False).do("lay it", lambda: write(tmp_path / "a" / "unit", "text"))
