import signal
import subprocess
import sys
from pathlib import Path

from diskwatch.rehearsal import temporary as module
from diskwatch.rehearsal.temporary import sweep, temporary
from tests.cli.run import ROOT

HOLDS = """
import pathlib, sys
from diskwatch.rehearsal import temporary
temporary._MEMORY = pathlib.Path(sys.argv[1])
with temporary.temporary() as folder:
    (folder / "history.db").write_text("x")
    print(folder, flush=True)
    sys.stdin.read()
"""


def said_by(child: "subprocess.Popen[str]") -> Path:
    assert child.stdout is not None
    return Path(child.stdout.readline().strip())


def test_the_folder_is_there_within_and_gone_afterwards():
    with temporary() as folder:
        (folder / "history.db").write_text("x", encoding="utf-8")
        sweep(folder.parent)
        assert (folder / "history.db").exists(), "one that is held is never swept, by its own process neither"
    assert not folder.exists()


def test_what_a_killed_rehearsal_left_is_removed_by_the_next_and_a_living_one_is_left_alone(
    tmp_path, monkeypatch
):
    with monkeypatch.context() as patched:
        patched.setattr(module, "_MEMORY", tmp_path)
        children = [
            subprocess.Popen(
                [sys.executable, "-c", HOLDS, str(tmp_path)],
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                text=True,
                cwd=ROOT,
            )
            for _ in range(2)
        ]
        try:
            killed, living = (said_by(child) for child in children)
            children[0].send_signal(signal.SIGKILL)
            children[0].wait()
            assert killed.exists()
            with temporary():
                assert not killed.exists()
                assert (living / "history.db").exists()
        finally:
            for child in children:
                child.communicate()
    assert not list(tmp_path.iterdir())


def test_nothing_is_swept_that_is_no_folder_of_ours(tmp_path):
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    (tmp_path / "diskwatch-invented-link").symlink_to(elsewhere)
    (tmp_path / "diskwatch-invented-file").write_text("x", encoding="utf-8")
    (tmp_path / "diskwatch-other").mkdir()
    (tmp_path / "diskwatch-invented-left").mkdir()
    sweep(tmp_path)
    left = {path.name for path in tmp_path.iterdir()}
    assert left == {"elsewhere", "diskwatch-invented-link", "diskwatch-invented-file", "diskwatch-other"}
