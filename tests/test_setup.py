"""The set-up scripts: what they do to a machine, and that README and CI name the same commands."""

import os
import re
import shutil
import stat
import subprocess
from collections.abc import Mapping
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
SETUP = ROOT / ".setup"
SCRIPTS = sorted(SETUP.iterdir())
COMMANDS = ["sh .setup/watch", "sh .setup/test"]
SERVICE = "smart" + "d"  # in pieces: this file does not name it either
MARK = "# laid by the set-up of diskwatch"


def shell(
    code: str, *arguments: str, path: Path | None = None, **environment: str
) -> subprocess.CompletedProcess[str]:
    """Run code after the scripts' common part; ``path`` goes before the search path."""
    env: Mapping[str, str] = os.environ | environment | {"DISKWATCH_CLONE": str(ROOT)}
    if path is not None:
        env = {**env, "PATH": f"{path}:{env['PATH']}"}
    whole = f'set -eu; top=$DISKWATCH_CLONE; . "$top/.setup/parts.sh"; {code}'
    asked = ["sh", "-c", whole, "sh", *arguments]
    return subprocess.run(asked, env=env, capture_output=True, text=True, timeout=30, check=False)


def program(folder: Path, name: str, code: str) -> Path:
    """A small program of the test's own."""
    folder.mkdir(exist_ok=True)
    made = folder / name
    made.write_text(f"#!/bin/sh\n{code}\n", encoding="utf-8")
    made.chmod(0o755)
    return made


def with_policy(policy: Path, code: str) -> subprocess.CompletedProcess[str]:
    return shell(f"policy=$1; policy_kept=$1.kept; {code}", str(policy))


@pytest.mark.parametrize("script", SCRIPTS, ids=lambda script: script.name)
def test_every_script_parses(script):
    asked = ["sh", "-n", script]
    done = subprocess.run(asked, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (0, "")


@pytest.mark.skipif(shutil.which("shellcheck") is None, reason="shellcheck is not installed here")
def test_shellcheck_has_nothing_to_say():
    asked = ["shellcheck", "-x", *(str(script.relative_to(ROOT)) for script in SCRIPTS), ".ci/run"]
    done = subprocess.run(asked, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.stdout == ""


@pytest.mark.parametrize("script", [*SCRIPTS, ROOT / ".ci" / "run"], ids=lambda script: script.name)
def test_no_script_names_a_service(script):
    text = script.read_text()
    assert SERVICE not in text.lower()
    assert not re.search(r"[a-z0-9]\.(service|timer|socket)\b", text)


def test_the_readme_gives_each_command_in_a_block_of_its_own():
    blocks = re.findall(r"^```\w*\n(.*?)^```$", (ROOT / "README.md").read_text(), re.MULTILINE | re.DOTALL)
    ours = [block.strip() for block in blocks if ".setup/" in block]
    assert ours == COMMANDS
    for command in ours:
        assert (ROOT / command.split()[1]).is_file()


@pytest.mark.skipif(shutil.which("bash") is None, reason="bash is not installed here")
def test_ci_runs_the_second_command_of_the_readme_as_it_stands(tmp_path):
    done = ci(
        tmp_path,
        "# A\n```sh\nsh .setup/watch\n```\nAnd `sh .setup/no`:\n```\nsh .setup/test --two 'words here'\n```\n",
    )
    assert done.stdout == "--two|words here|"
    assert done.returncode == 7


@pytest.mark.skipif(shutil.which("bash") is None, reason="bash is not installed here")
@pytest.mark.parametrize("readme", ["", "```\nsh .setup/watch\n```\n", "sh .setup/watch\nsh .setup/test\n"])
def test_ci_stops_where_the_readme_does_not_name_two_commands(tmp_path, readme):
    done = ci(tmp_path, readme)
    assert done.returncode == 1
    assert "should name two" in done.stderr


def ci(folder: Path, readme: str) -> subprocess.CompletedProcess[str]:
    """Run CI's script on a clone of the test's own; its command prints its arguments and ends with 7."""
    (folder / ".ci").mkdir()
    shutil.copy(ROOT / ".ci" / "run", folder / ".ci" / "run")
    (folder / "README.md").write_text(readme)
    program(folder / ".setup", "test", "printf '%s|' \"$@\"; exit 7")
    bin_ = program(folder / "bin", "apt-get", "exit 0").parent
    env = os.environ | {"PATH": f"{bin_}:{os.environ['PATH']}"}
    asked = ["bash", str(folder / ".ci" / "run")]
    return subprocess.run(asked, env=env, cwd="/", capture_output=True, text=True, timeout=30, check=False)


def test_starts_are_forbidden_and_the_owners_policy_comes_back_as_it_was(tmp_path):
    policy = program(tmp_path, "policy", "# the owner's\nexit 0")
    policy.chmod(0o751)
    before = (policy.read_text(), stat.S_IMODE(policy.stat().st_mode), policy.stat().st_mtime_ns)
    done = with_policy(policy, 'forbid_starts; if "$policy"; then :; else echo $?; fi; allow_starts')
    assert done.stdout == "101\n"
    assert (policy.read_text(), stat.S_IMODE(policy.stat().st_mode), policy.stat().st_mtime_ns) == before
    assert [path.name for path in tmp_path.iterdir()] == ["policy"]


def test_where_there_was_no_policy_none_is_left(tmp_path):
    done = with_policy(
        tmp_path / "policy", 'forbid_starts; if "$policy"; then :; else echo $?; fi; allow_starts'
    )
    assert done.stdout == "101\n"
    assert not list(tmp_path.iterdir())


def test_what_a_killed_run_left_behind_is_put_right(tmp_path):
    policy = program(tmp_path, "policy", "exit 0")
    with_policy(policy, "forbid_starts; kill -KILL $$")
    assert MARK in policy.read_text()
    with_policy(policy, "allow_starts")
    assert policy.read_text() == "#!/bin/sh\nexit 0\n"
    assert [path.name for path in tmp_path.iterdir()] == ["policy"]


def test_a_policy_of_the_owners_is_not_taken_for_ours(tmp_path):
    policy = program(tmp_path, "policy", "exit 101")
    with_policy(policy, "allow_starts")
    assert policy.read_text() == "#!/bin/sh\nexit 101\n"


INSTALLING = """
am_root() {{ true; }}; policy=$1/policy; policy_kept=$1/kept
fetch_lists() {{ :; }}
installed() {{ [ -e "$state/installed" ]; }}
state=$1
apt_get() {{ {apt}; }}
want no-such-program a-package 'it is missed'
"""


def install(folder: Path, apt: str) -> tuple[subprocess.CompletedProcess[str], list[str]]:
    """Install a package that brings a unit, as a machine of the test's own would; what was disabled, too."""
    bin_ = folder / "bin"
    program(bin_, "dpkg", "printf '%s\\n' /lib/systemd/system/brought.service /usr/share/doc/other.service")
    program(bin_, "systemctl", f'echo "$@" >>{folder}/disabled')
    program(bin_, "apt-get", "exit 1")
    done = shell(INSTALLING.format(apt=apt), str(folder), path=bin_)
    told = folder / "disabled"
    return done, told.read_text().splitlines() if told.exists() else []


def test_units_that_an_installation_brought_are_disabled(tmp_path):
    done, disabled = install(tmp_path, 'touch "$state/installed"; "$policy" || echo "$?"')
    assert done.returncode == 0, done.stderr
    assert done.stdout == "101\n"
    assert disabled == ["--quiet disable brought.service"]
    assert not (tmp_path / "policy").exists()


def test_units_are_disabled_also_when_the_installation_is_broken_off(tmp_path):
    done, disabled = install(tmp_path, 'touch "$state/installed"; kill -TERM $$; return 1')
    assert done.returncode == -15
    assert disabled == ["--quiet disable brought.service"]
    assert not (tmp_path / "policy").exists()


def test_a_package_that_was_there_before_is_left_alone(tmp_path):
    (tmp_path / "installed").touch()
    done, disabled = install(tmp_path, "echo touched")
    assert done.returncode == 0
    assert done.stdout == ""
    assert disabled == []


def test_a_failed_installation_is_told_and_the_run_goes_on(tmp_path):
    done, disabled = install(tmp_path, "return 100")
    assert done.returncode == 0
    assert done.stderr.splitlines()[-1] == "diskwatch: a-package could not be installed, so it is missed"
    assert disabled == []


def test_an_ordinary_user_gets_one_line_with_the_command_for_an_administrator(tmp_path):
    bin_ = program(tmp_path / "bin", "apt-get", "echo asked >&2; exit 1").parent
    program(bin_, "dpkg", "exit 1")
    program(bin_, "sudo", "echo asked >&2; exit 1")
    done = shell("am_root() { false; }; want no-such-program a-package 'it is missed'", path=bin_)
    assert done.returncode == 0
    assert done.stderr == (
        "diskwatch: no-such-program is missing, so it is missed; "
        "an administrator runs: apt-get update && apt-get install a-package\n"
    )


def test_a_program_that_is_there_is_not_spoken_of():
    done = shell("want sh a-package 'it is missed'")
    assert (done.returncode, done.stderr) == (0, "")


def test_an_ordinary_user_without_the_venv_module_is_told_and_the_run_ends(tmp_path):
    bin_ = program(tmp_path / "bin", "apt-get", "exit 1").parent
    done = shell("am_root() { false; }; find_python() { return 1; }; need_python; echo went on", path=bin_)
    assert done.returncode == 1
    assert done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    assert done.stderr.endswith("an administrator runs: apt-get update && apt-get install python3-venv\n")


def test_the_python_that_is_found_is_new_enough(tmp_path):
    program(tmp_path, "python3", "exit 1")  # one that is too old says no to every question
    done = shell('find_python && "$python" -c "import sys; print(sys.version_info >= (3, 11))"', path=tmp_path)
    if done.returncode:
        pytest.skip("there is no other Python here that makes environments")
    assert done.stdout == "True\n"


FAKE_PYTHON = """
case $* in
-VV) echo "$FAKE_VERSION" ;;
'-m venv '*) mkdir -p "$3/bin"; cp "$0" "$3/bin/python"; echo made >>"$FAKE_LOG" ;;
'-m pip install --quiet '*) shift 4; echo "$@" >>"$FAKE_LOG"; [ "${FAKE_NETWORK:-yes}" = yes ] ;;
-c*) true ;;
esac
"""


class Filling:
    """Fills an environment in a clone of its own, with a Python that only notes what is asked of it."""

    def __init__(self, folder: Path) -> None:
        self.python = program(folder, "python", FAKE_PYTHON)
        self.log = folder / "log"
        self.clone = folder / "clone"
        self.clone.mkdir()
        self.said: list[str] = []
        self.project("one")

    def project(self, text: str) -> None:
        """Write the project file."""
        (self.clone / "pyproject.toml").write_text(text)

    def __call__(self, *names: str, version: str = "3.11", network: str = "yes") -> list[str]:
        """Fill for each name in turn; what was asked of Python comes back."""
        self.log.write_text("")
        each = 'for name in "$@"; do fill "$name" "$name-things"; done'
        done = shell(
            f"top=$1; venv=$top/.venv; fake=$2; need_python() {{ python=$fake; }}; shift 2; {each}",
            *(str(self.clone), str(self.python), *names),
            FAKE_LOG=str(self.log),
            FAKE_VERSION=version,
            FAKE_NETWORK=network,
        )
        self.said = done.stderr.splitlines()
        return self.log.read_text().splitlines()


@pytest.fixture
def fill(tmp_path):
    return Filling(tmp_path)


def test_an_environment_is_filled_once(fill):
    assert fill("watch") == ["made", "--upgrade pip", "watch-things"]
    assert fill("watch") == []


def test_tools_for_tests_are_added_to_the_environment_and_do_not_drive_it_out(fill):
    fill("watch")
    assert fill("watch", "test") == ["test-things"]
    assert fill("watch") == []


def test_an_environment_is_made_anew_for_another_project_file_or_python(fill):
    fill("watch", "test")
    assert fill("watch", version="3.12") == ["made", "--upgrade pip", "watch-things"]
    fill.project("two")
    assert fill("watch", version="3.12") == ["made", "--upgrade pip", "watch-things"]


def test_a_failed_installation_is_one_plain_line_and_is_tried_again(fill):
    assert fill("watch", "test", network="no") == ["made", "--upgrade pip"]
    assert "is there a network?" in fill.said[-1]
    assert "watch-things" in fill("watch")


def test_a_clone_that_cannot_be_written_gets_its_environment_in_the_users_cache(tmp_path):
    code = 'top=$1/not-there; choose_place; echo "$venv"'  # what is not there cannot be written, even by root
    done = shell(code, str(tmp_path), XDG_CACHE_HOME=str(tmp_path / "cache"))
    assert Path(done.stdout.strip()).parent == tmp_path / "cache" / "diskwatch"
    assert (tmp_path / "cache" / "diskwatch").is_dir()


def test_a_clone_that_can_be_written_holds_its_environment(tmp_path):
    assert shell('top=$1; choose_place; echo "$venv"', str(tmp_path)).stdout == f"{tmp_path}/.venv\n"
