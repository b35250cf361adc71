import os
import signal
import subprocess

import pytest

from diskwatch.cli import main
from diskwatch.history.lock import WatchLock
from diskwatch.history.reader import Past
from tests.cli.run import COMMAND, ROOT, run, settings_for
from tests.cli.test_watch import GOOD, drives, once

OTHER = {"node": "/dev/inv2", "type": "sat", "folder": "invented_hdd_series"}


@pytest.fixture
def state(tmp_path):
    """A history with two drives."""
    once(tmp_path, [GOOD, OTHER])
    return tmp_path / "state"


def tell(state, *words):
    return run("tell", *words, "--state", state)


def test_what_is_told_is_shown_by_bays_and_why_and_stands_in_the_day_book(tmp_path, state):
    words = (
        "--label",
        "left bay",
        "--asset",
        "A-17",
        "--warranty-until",
        "2031-05-31",
        "--backed-up",
        "2026-11-20",
    )
    ended = tell(state, "inv1", *words)
    assert (ended.code, ended.err) == (0, "")
    told = drives(tmp_path)["/dev/inv1"]
    assert (told["label"], told["asset"]) == ("left bay", "A-17")
    assert (told["warranty_until"], told["backed_up"]) == ("2031-05-31", "2026-11-20")
    for command in (("bays",), ("why", "left bay")):
        shown = " ".join(run(*command, "--state", state).out.split())
        assert "left bay" in shown
        assert "You said: asset A-17, its warranty lasts until 2031-05-31, backed up on 2026-11-20" in shown
    book = run("daybook", "--json", "--drive", "left bay", "--state", state).json["entries"]
    assert [entry["data"]["value"] for entry in book if entry["kind"] == "owner"] == [
        "left bay",
        "A-17",
        "2031-05-31",
        "2026-11-20",
    ]


def test_empty_words_take_a_fact_back_and_leave_the_others(tmp_path, state):
    tell(state, "inv1", "--label", "left bay", "--asset", "A-17")
    assert tell(state, "left bay", "--label", "").code == 0
    told = drives(tmp_path)["/dev/inv1"]
    assert (told["label"], told["asset"]) == (None, "A-17")


@pytest.mark.parametrize(
    ("words", "why"),
    [
        (("inv1",), "nothing is told"),
        (("nobody", "--label", "x"), "no drive is called nobody"),
        (("inv", "--label", "x"), "could be more than one drive"),
        (("", "--label", "x"), "no drive is named"),
        (("inv1", "--label", "\x1b[31mred"), "control character U+001B"),
        (("inv1", "--label", "two\nlines"), "control character U+000A"),
        (("inv1", "--label", "\u202egnol"), "control character U+202E"),
        (("inv1", "--label", "x" * 100_000), "100,000 letters"),
        (("inv1", "--label", "inv2"), "already"),
        (("inv1", "--label", "/DEV/INV2"), "already"),
        (("inv1", "--backed-up", "2026-02-30"), "no day of the calendar"),
        (("inv1", "--backed-up", "2199-01-01"), "has not come yet"),
        (("inv1", "--warranty-until", "next year"), "no day of the calendar"),
    ],
)
def test_what_cannot_be_right_ends_with_2_in_one_harmless_line_and_changes_nothing(state, words, why):
    before = (state / "history.db").read_bytes()
    ended = tell(state, *words)
    assert ended.code == 2
    assert why in ended.err
    assert ended.err.count("\n") == 1
    assert not any(ord(letter) < 32 for letter in ended.err.rstrip("\n"))
    assert (state / "history.db").read_bytes() == before


def test_a_label_of_a_megabyte_is_refused_where_the_kernel_would_take_it(state, capsys):
    assert main(["tell", "inv1", "--label", "x" * 1_000_000, "--state", str(state)]) == 2
    assert "1,000,000 letters" in capsys.readouterr().err


def test_without_a_history_there_is_nothing_to_tell_of(tmp_path):
    assert tell(tmp_path / "none", "inv1", "--label", "x").code == 3
    assert not (tmp_path / "none").exists()


def test_while_a_watch_runs_that_watch_keeps_it(tmp_path, state):
    settings = settings_for(tmp_path / "player" / "smartctl", tmp_path, more='[io]\nevery = "1s"\n')
    with subprocess.Popen(
        [*COMMAND, "watch", "--state", str(state), "--settings", str(settings)],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        cwd=ROOT,
    ) as watch:
        try:
            assert watch.stdout is not None
            assert watch.stdout.readline()
            ended = tell(state, "inv1", "--label", "left bay")
            assert (ended.code, ended.err) == (0, "")
            with Past.open(state) as past:
                assert past.find("left bay").place.device == "/dev/inv1"
        finally:
            watch.send_signal(signal.SIGTERM)
            assert watch.wait(30) == 0
    assert drives(tmp_path)["/dev/inv1"]["label"] == "left bay"


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root to become another user")
@pytest.mark.parametrize("watched", [False, True])
def test_without_the_right_to_write_it_ends_with_4_and_says_what_to_do(tmp_path, state, capfd, watched):
    lock = WatchLock.take(state) if watched else None
    try:
        child = os.fork()
        if child == 0:
            for folder in tmp_path.parents:
                if str(folder) != "/" and folder.owner() == "root" and folder.name.startswith("pytest"):
                    folder.chmod(0o755)
            tmp_path.chmod(0o755)
            os.seteuid(65534)
            os._exit(main(["tell", "inv1", "--label", "mine", "--state", str(state)]))
        assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 4
    finally:
        if lock is not None:
            lock.release()
    assert "run as" in capfd.readouterr().err
    assert drives(tmp_path)["/dev/inv1"]["label"] is None
