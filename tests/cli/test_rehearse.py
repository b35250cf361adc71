import contextlib
import signal
import sqlite3
import subprocess
import time
from pathlib import Path

import pytest

from diskwatch.history.reader import Past
from tests.cli.run import COMMAND, ROOT, run
from tests.rehearsal.test_state import keep
from tests.samples import HDD as REAL

SMALL = """
title = "Small"
about = "Two drives, one of which is scratched and later dies."
place = "an invented test"
days = 24
[[drive]]
serial = "INVENTED-1"
model = "Nordwall INVENTED"
kind = "hdd"
device = "/dev/sda"
bay = "one"
capacity_gb = 1000
as_text = true
[[drive]]
serial = "INVENTED-2"
model = "Borealis INVENTED"
kind = "nvme"
device = "/dev/nvme0"
bay = "two"
capacity_gb = 500
[[event]]
what = "scratch"
day = 5
drive = "INVENTED-1"
units = 60
growth = 0.2
[[event]]
what = "dies"
day = 20
drive = "INVENTED-1"
[[expect]]
drive = "INVENTED-1"
call = "copy"
cause = "media"
from_day = 5
by_day = 15
because = "so much fresh damage is no accident"
[[expect]]
drive = "INVENTED-1"
call = "look"
by_day = 4
because = "it would be slow first"
[[expect]]
stays = "keep"
because = "the other drive is untouched"
"""


@pytest.fixture
def small(tmp_path):
    path = tmp_path / "small.toml"
    path.write_text(SMALL, encoding="utf-8")
    return path


def test_the_answer_is_replays_object_with_what_was_expected(small):
    ended = run("rehearse", small, "--headless", "--json")
    assert ended.code == 0, ended.err
    told = ended.json
    assert told["invented"] is True
    scratched, other = told["drives"]
    assert (scratched["failed"], scratched["worst"], other["worst"]) == (True, "retire", "keep")
    assert [one["call"] for one in scratched["calls"]][:2] == ["keep", "look"]
    assert scratched["calls"][1]["cause"] == "media"
    assert set(scratched["calls"][0]) == {"at", "call", "cause", "reason", "evidence"}
    assert all(set(drift) == {"at", "signal", "evidence"} for drift in scratched["drifts"])
    summary = told["summary"]
    assert (summary["drives"], summary["failed"]) == (2, 1)
    assert (summary["warned_failed"], summary["warned_sound"]) == (1, 0)
    assert 5 < summary["median_lead_days"] < 15
    assert summary["drive_days"] == 20 + 25  # the run ends with the first moment of a day
    assert [one["verdict"] for one in told["expected"]] == ["reached", "missed", "reached"]


def test_the_same_seed_gives_the_same_bytes_and_another_seed_another_life(small):
    # How a process scatters its hashes must show nowhere.
    first, again, other = (
        run("rehearse", small, "--json", "--seed", seed, env={"PYTHONHASHSEED": hashes}).out
        for seed, hashes in ((7, "1"), (7, "99"), (8, "1"))
    )
    assert first == again
    assert first != other


def test_a_kept_history_is_the_same_to_the_byte_and_says_that_it_is_invented(small, tmp_path):
    folders = [tmp_path / name for name in ("a", "b")]
    for folder in folders:
        assert run("rehearse", small, "--headless", "--state", folder).code == 0
    dumps = []
    for folder in folders:
        connection = sqlite3.connect(folder / "history.db")
        # When the tables were laid out is the one thing that tells two runs apart.
        dumps.append([line for line in connection.iterdump() if "_sqlite_migrations" not in line])
        connection.close()
    assert dumps[0] == dumps[1]
    with Past.open(folders[0]) as past:
        lines = past.bays(0).drives
    assert all("INVENTED" in line.name for line in lines)
    assert "INVENTED" in run("daybook", "--state", folders[0]).out
    assert "INVENTED-1" in run("bays", "--state", folders[0]).out


def test_a_person_is_told_the_story_and_that_it_is_invented(small):
    ended = run("rehearse", small)
    assert ended.code == 0
    assert "EVERYTHING HERE IS INVENTED" in ended.out.splitlines()[0]
    assert "reached on day" in ended.out
    assert "missed on day" in ended.out
    assert "dashboard" in ended.err
    assert "\r" not in ended.err, "no bar where there is no terminal"


def test_a_death_without_warning_is_told_as_what_it_is(tmp_path):
    path = tmp_path / "dead.toml"
    path.write_text(SMALL.replace("\nday = 5\n", "\nday = 23\n"), encoding="utf-8")
    told = run("rehearse", path, "--headless").out
    assert "nothing had told to copy it off: no error counter had moved" in told


def test_a_shorter_run_leaves_open_what_was_expected_later(small):
    told = run("rehearse", small, "--json", "--days", 3).json
    assert [one["verdict"] for one in told["expected"]] == ["open", "open", "kept so far"]
    assert told["to"] == "2025-01-04T00:00:00Z"
    text = run("rehearse", small, "--headless", "--days", 3).out
    assert "not yet " in text
    assert "kept so far" in text
    assert "reached" not in text


def test_everything_that_is_told_says_that_it_is_invented(small):
    for words in (("--headless",), ("--list",)):
        assert "INVENTED" in run("rehearse", small, *words, "--days", 1).out.splitlines()[0]
    lived, listed = (
        run("rehearse", small, more, "--days", 1, "--json").json for more in ("--headless", "--list")
    )
    assert lived["invented"] is listed["invented"] is True
    assert "invented" in lived["place"]
    assert all("INVENTED" in drive["model"] for drive in lived["drives"])
    for scenario in listed["scenarios"]:
        assert "invented" in scenario["place"]
        assert all(serial.startswith("INVENTED") for serial in scenario["serials"])


def test_the_help_says_that_a_rehearsal_keeps_nothing_by_itself():
    told = " ".join(run("rehearse", "--help").out.split())
    assert "temporary" in told
    assert "system's" not in told
    assert "which is only checked" in told
    assert "the system's" in " ".join(run("bays", "--help").out.split())


def test_a_wrong_number_in_a_file_exits_2_with_one_line(small):
    for wrong, named in (("day = nan", "[[event]] 1, day"), ("day = inf", "[[event]] 1, day")):
        small.write_text(SMALL.replace("day = 5\n", f"{wrong}\n"), encoding="utf-8")
        ended = run("rehearse", small, "--headless")
        assert (ended.code, ended.out, ended.err.count("\n")) == (2, "", 1)
        assert f"small.toml: {named}: expected a number from 0 to 36525" in ended.err


def test_the_list_names_every_scenario():
    told = run("rehearse", "--list")
    assert told.code == 0
    names = {one["name"] for one in run("rehearse", "--list", "--json").json["scenarios"]}
    assert names >= {"scratched-media", "sudden-death"}
    assert all(name in told.out for name in names)


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("lose-cable",), "did you mean loose-cable"),
        (("--days", "0"), "1 to 36525"),
        (("--speed", "0"), "above 0"),
        (("--seed", "x"), "--seed"),
        (("--seed", "9" * 30), "below 2^63"),
        (("--days", "٣"), "1 to 36525"),
    ],
)
def test_wrong_usage_exits_2_with_one_line(words, told):
    ended = run("rehearse", *words)
    assert (ended.code, ended.out, ended.err.count("\n")) == (2, "", 1)
    assert told in ended.err


def test_a_state_that_holds_real_drives_is_refused_and_left_as_it_was(tmp_path, small):

    keep(tmp_path / "real", REAL)
    before = (tmp_path / "real" / "history.db").read_bytes()
    ended = run("rehearse", small, "--headless", "--state", tmp_path / "real")
    assert ended.code == 2
    assert "real drives" in ended.err
    assert (tmp_path / "real" / "history.db").read_bytes() == before


@pytest.mark.parametrize("ends", [signal.SIGTERM, signal.SIGHUP])
def test_a_rehearsal_that_is_ended_leaves_nothing_behind(small, ends):
    child = subprocess.Popen(
        [*COMMAND, "rehearse", str(small), "--headless", "--speed", "0.5"], cwd=ROOT, stderr=subprocess.PIPE
    )
    try:
        until = time.monotonic() + 20
        while not (held := open_folders(child.pid)) and time.monotonic() < until:
            time.sleep(0.02)
        assert held
        child.send_signal(ends)
        _, told = child.communicate(timeout=20)
    finally:
        child.kill()
        child.wait()
    assert child.returncode == 128 + ends
    assert b"Traceback" not in told
    assert not any(folder.exists() for folder in held)


def open_folders(pid: int) -> list[Path]:
    """Folders of invented drives' histories that a process holds open."""
    found = []
    for one in Path(f"/proc/{pid}/fd").iterdir():
        with contextlib.suppress(OSError):
            named = one.readlink()
            if named.name == "history.db":
                found.append(named.parent)
    return found


def test_the_speed_bounds_how_fast_days_go_by(small):
    # Two days at eight a second take a quarter of a second at the least.

    begun = time.monotonic()
    assert run("rehearse", small, "--json", "--days", 2, "--speed", 8).code == 0
    assert time.monotonic() - begun >= 0.25


def test_an_empty_name_is_no_folder_and_nothing_is_kept_where_the_command_was_called():
    ended = run("rehearse", "scratched-media", "--headless", "--days", 1, "--state", "")
    assert (ended.code, ended.err.count("\n")) == (2, 1)
