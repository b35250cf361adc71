import signal
import subprocess

import pytest

from diskwatch.history.reader import Past
from tests.cli.run import COMMAND, ROOT, run, settings_for
from tests.cli.test_watch import GOOD, drives
from tests.player import lay, set_day

SERIES = {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_series"}


@pytest.fixture
def state(tmp_path):
    """A history in which /dev/inv1 shows fresh defects, and /dev/inv2 none."""
    command = lay(tmp_path / "player", [SERIES, {**GOOD, "node": "/dev/inv2"}])
    settings = settings_for(command, tmp_path, more='[io]\nevery = "1s"\n')
    for day in (1, 2):
        set_day(command, day)
        assert run("watch", "--once", "--state", tmp_path / "state", "--settings", settings).code == 0
    assert drives(tmp_path)["/dev/inv1"]["call"] != "keep"
    return tmp_path / "state"


def settle(state, *words):
    return run("settle", *words, "--state", state)


def test_the_owners_word_lets_a_call_fall_and_stands_in_the_day_book(tmp_path, state):
    was = drives(tmp_path)["/dev/inv1"]["call"]
    ended = settle(state, "inv1", "--because", "its sectors were rewritten")
    assert (ended.code, ended.err) == (0, "")
    assert f"Its call was {was} and is now keep." in ended.out
    assert drives(tmp_path)["/dev/inv1"]["call"] == "keep"
    book = run("daybook", "--json", "--drive", "inv1", "--state", state).json["entries"]
    (entry,) = [entry for entry in book if entry["kind"] == "settled"]
    assert entry["data"]["because"] == "its sectors were rewritten"


def test_a_replaced_drive_leaves_the_bays_and_every_other_command_still_knows_it(tmp_path, state):
    was = drives(tmp_path)["/dev/inv1"]
    ended = settle(state, "inv1", "--because", "it was failing", "--replaced-by", "inv2")
    assert (ended.code, ended.err) == (0, "")
    bays = run("bays", "--json", "--state", state).json
    assert "/dev/inv1" not in {drive["device"] for drive in bays["drives"]}
    (gone,) = bays["departed"]
    assert (gone["call"], gone["replaced_by"]) == (was["call"], drives(tmp_path)["/dev/inv2"]["serial"])
    assert f"{gone['replaced_by']} took its place" in " ".join(run("bays", "--state", state).out.split())
    assert run("why", was["serial"], "--state", state).code == 0
    assert was["serial"] in run("export-history", "--state", state).out
    book = run("daybook", "--json", "--state", state).json["entries"]
    assert {was["serial"], gone["replaced_by"]} <= {
        entry["drive"] for entry in book if entry["kind"] in {"settled", "owner"}
    }


@pytest.mark.parametrize(
    ("words", "why"),
    [
        (("inv1",), "--because"),
        (("inv1", "--because", " "), "holds no words"),
        (("inv1", "--because", "\x1b[2J"), "control character U+001B"),
        (("inv1", "--because", "x" * 501), "501 letters"),
        (("nobody", "--because", "so"), "no drive is called nobody"),
        (("inv1", "--because", "so", "--replaced-by", "nobody"), "no drive is called nobody"),
        (("inv1", "--because", "so", "--replaced-by", "/dev/inv1"), "replaced by itself"),
    ],
)
def test_what_cannot_be_right_ends_with_2_and_settles_nothing(state, words, why):
    before = (state / "history.db").read_bytes()
    ended = settle(state, *words)
    assert ended.code == 2
    assert why in ended.err
    assert (state / "history.db").read_bytes() == before


def test_while_a_watch_runs_that_watch_settles_it_and_goes_on_from_there(tmp_path, state):
    settings = tmp_path / "settings.toml"
    with subprocess.Popen(
        [*COMMAND, "watch", "--state", str(state), "--settings", str(settings)],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        cwd=ROOT,
    ) as watch:
        try:
            assert watch.stdout is not None
            assert watch.stdout.readline()
            ended = settle(state, "inv1", "--because", "its sectors were rewritten")
            assert (ended.code, ended.err) == (0, "")
            with Past.open(state) as past:
                call = past.find("/dev/inv1").call
            assert call is not None
            assert call.word == "keep"
        finally:
            watch.send_signal(signal.SIGTERM)
            assert watch.wait(30) == 0
    assert run("watch", "--once", "--state", state, "--settings", settings).code == 0
    assert drives(tmp_path)["/dev/inv1"]["call"] == "keep", "the next pass must not bring the old call back"
