"""The rules of the house that no single room can keep alone."""

import ast
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]

TOP_LEVEL = {
    "README.md",
    "DEVELOPERS.md",
    "LICENSE",
    "pyproject.toml",
    "diskwatch",
    "tests",
    "systemd",
    "fixtures",
}

# Files with code and without a test of their own, each with the reason.
NO_TWIN = {
    "diskwatch/__main__.py": "hands over to the command line, which the commands' tests start",
}

# A package's own code is tested under the name of what it holds.
OTHER_NAME = {"diskwatch/cli/__init__.py": "tests/cli/test_main.py"}

# Written in pieces, so that this file does not hold what it looks for.
FORBIDDEN = {
    "a path of one machine": ("/wo" + "rk/", "/opt/" + "dw", "/root" + "/", "/tm" + "p/briefs"),
    "a package registry": ("pyp" + "i.org", "python" + "hosted.org", "npm" + "js.", "crates" + ".io"),
    "a monitoring service": ("smart" + "d",),
}

IMPURE = (
    "apscheduler",
    "numpy",
    "psutil",
    "pySMART",
    "sqlite3",
    "sqlite_utils",
    "subprocess",
    "textual",
)


def tracked() -> list[str]:
    """Every file that the repository holds."""
    if shutil.which("git") is None or not (ROOT / ".git").exists():
        pytest.skip("not a clone: what belongs to the repository cannot be told")
    # The clone may be another user's, where git needs to be told that it may look.
    asked = ["git", "-c", "safe.directory=*", "ls-files", "-z"]
    told = subprocess.run(asked, cwd=ROOT, capture_output=True, text=True, check=True)
    return [name for name in told.stdout.split("\0") if name]


def does_something(path: Path) -> bool:
    """Whether a module holds a function that does more than stand for its type."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    return any(
        isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
        and any(
            not isinstance(line, ast.Expr) or not isinstance(line.value, ast.Constant) for line in node.body
        )
        for node in ast.walk(tree)
    )


def twin(name: str) -> str:
    """The file that tests a file."""
    path = Path(name).relative_to("diskwatch")
    return OTHER_NAME.get(name, str(Path("tests") / path.parent / f"test_{path.stem}.py"))


def test_imports_run_down_the_house():
    code = "from importlinter.cli import lint_imports_command as check; check()"
    done = subprocess.run(
        [sys.executable, "-c", code, "--no-cache"], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stdout + done.stderr
    assert " 0 broken" in done.stdout


def test_every_file_with_code_has_a_test_of_its_own():
    held = set(tracked())
    files = [name for name in held if name.startswith("diskwatch/") and name.endswith(".py")]
    with_code = {name for name in files if (ROOT / name).exists() and does_something(ROOT / name)}
    assert len(with_code) > 5
    lacking = sorted(name for name in with_code - NO_TWIN.keys() if twin(name) not in held)
    assert not lacking, "\n".join(lacking)


def test_no_file_is_excused_from_a_test_that_exists_or_that_it_does_not_need():
    held = set(tracked())
    for name in NO_TWIN:
        assert name in held
        assert twin(name) not in held


def test_the_top_level_holds_what_it_should_and_nothing_else():
    top = {name.split("/")[0] for name in tracked()}
    assert {name for name in top if not name.startswith(".")} == TOP_LEVEL


@pytest.mark.parametrize("what", FORBIDDEN)
def test_no_tracked_file_holds_what_is_not_the_products(what):
    found = []
    for name in tracked():
        path = ROOT / name
        text = path.read_text(encoding="utf-8", errors="replace").lower() if path.is_file() else ""
        found += [f"{name}: {word}" for word in FORBIDDEN[what] if word.lower() in text or word.lower() in name]
    assert not found, "\n".join(found)


@pytest.mark.parametrize("room", ["analyser", "judge", "trends"])
def test_the_core_brings_no_database_screen_or_process_into_the_program(room):
    code = (
        "import sys; before = set(sys.modules); import importlib, pkgutil\n"
        f"import diskwatch.{room} as room\n"
        "parts = pkgutil.walk_packages(room.__path__, room.__name__ + '.')\n"
        "for part in parts: importlib.import_module(part.name)\n"
        "print(*sorted(set(sys.modules) - before))"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    brought = done.stdout.split()
    assert f"diskwatch.{room}" in brought
    assert not {name.split(".")[0] for name in brought} & set(IMPURE)
