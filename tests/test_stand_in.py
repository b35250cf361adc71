import importlib
import subprocess
import sys

import pytest

from diskwatch.stand_in import without


@pytest.fixture
def library(tmp_path, monkeypatch):
    """A library that takes a word from a heavy one as it loads, and both again where they are asked for."""
    monkeypatch.syspath_prepend(tmp_path)
    (tmp_path / "invented_heavy.py").write_text("word, other = 'real', 'real'\n")

    def write(code):
        (tmp_path / "invented_library.py").write_text(code)

    yield write
    for name in ("invented_heavy", "invented_library"):
        sys.modules.pop(name, None)


def load():
    return without("invented_library", "invented_heavy", {"word": "stand-in"})


def test_the_heavy_library_is_not_loaded_and_can_be_loaded_later(library):
    library("from invented_heavy import word\n")
    assert load().word == "stand-in"
    assert "invented_heavy" not in sys.modules
    assert importlib.import_module("invented_heavy").word == "real"


def test_a_library_that_needs_more_than_the_stand_in_has_is_loaded_as_usual(library):
    library("from invented_heavy import word, other\n")
    assert (load().word, load().other) == ("real", "real")


def test_what_was_loaded_before_is_used(library):
    library("from invented_heavy import word\n")
    importlib.import_module("invented_heavy")
    assert load().word == "real"


def test_the_watch_holds_no_library_that_it_never_uses():
    code = (
        "import sys, diskwatch.service.watch\n"
        "from diskwatch.machine.held import _library; _library()\n"
        "print([name for name in ('asyncio', 'chardet', 'sqlite_utils', 'ssl', 'textual', 'jeepney')"
        " if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert (done.stdout, done.stderr) == ("[]\n", "")
