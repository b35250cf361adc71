import subprocess
from pathlib import Path

import pytest

from diskwatch import __version__
from diskwatch.cli import COMMANDS
from tests.cli.run import COMMAND, run


@pytest.mark.parametrize("command", sorted(COMMANDS))
def test_every_command_has_its_own_help(command):
    ended = run(command, "--help")
    assert ended.code == 0
    assert "--state" in ended.out
    assert "--settings" in ended.out


def test_the_bare_help_lists_every_command():
    told = run("--help").out
    assert all(command in told for command in COMMANDS)


def test_the_version_is_told():
    assert run("--version").out == f"diskwatch {__version__}\n"


@pytest.mark.parametrize(
    ("words", "hint"),
    [(("bay",), "did you mean bays?"), (("frobnicate",), "known are"), (("bays", "--jsn"), "--help")],
)
def test_wrong_usage_exits_2_with_one_line_and_a_hint(words, hint):
    ended = run(*words)
    assert (ended.code, ended.err.count("\n"), ended.out) == (2, 1, "")
    assert hint in ended.err


def test_a_wrong_settings_file_exits_2_and_names_file_key_and_expectation(tmp_path):
    path = tmp_path / "wrong.toml"
    path.write_text('[smart]\nevery = "soon"\n')
    for command in ("watch", "preflight", "bays", "daybook"):
        ended = run(command, "--settings", path, "--state", tmp_path)
        assert ended.code == 2
        assert all(word in ended.err for word in ("wrong.toml", "[smart] every", "30m"))


def test_a_settings_file_that_is_not_there_exits_2(tmp_path):
    assert run("watch", "--once", "--settings", tmp_path / "none.toml", "--state", tmp_path).code == 2


def test_output_that_cannot_be_written_exits_4_with_one_line(tmp_path):
    with Path("/dev/full").open("w", encoding="utf-8") as full:
        words = [*COMMAND, "bays", "--json", "--state", str(tmp_path)]
        done = subprocess.run(words, stdout=full, stderr=subprocess.PIPE, text=True, check=False)
    assert done.returncode == 4
    assert done.stderr.count("\n") == 1
    assert "No space left" in done.stderr


def test_a_reader_that_goes_away_is_no_error():
    words = f"{' '.join(COMMAND)} --help | head -c 1 >/dev/null"
    done = subprocess.run(["sh", "-c", words], capture_output=True, text=True, check=False)
    assert done.stderr == ""


@pytest.mark.parametrize(
    "shell", ["exec {} bays --json --state {} >&-", "PYTHONIOENCODING=ascii exec {} bays --json --state {}"]
)
def test_streams_that_are_closed_or_know_ascii_only_end_no_command(tmp_path, shell):
    words = shell.format(" ".join(COMMAND), tmp_path)
    done = subprocess.run(["sh", "-c", words], capture_output=True, text=True, check=False)
    assert done.returncode == 3, done.stderr
    assert "Traceback" not in done.stderr
