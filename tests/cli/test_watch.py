import shutil
import signal
import sqlite3
import stat
import subprocess
import time
from contextlib import suppress

import pytest

from diskwatch.analyser import UNREAD_LIMIT
from diskwatch.cli.watch import Voice, machine
from diskwatch.history.lock import watcher
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import DriveRound, KnownDrive, Round, Way
from diskwatch.settings import Settings
from tests.cli.run import COMMAND, ROOT, run, settings_for
from tests.player import calls, lay, lay_plan, set_day
from tests.samples import HDD, HERE, NOON, read

GOOD = {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_sister"}


def once(tmp_path, drives, *, state="state", timeout="20s", **machine):
    command = lay(tmp_path / "player", drives, **machine)
    settings = settings_for(command, tmp_path, timeout=timeout)
    ended = run("watch", "--once", "--state", tmp_path / state, "--settings", settings)
    return ended, command


def drives(tmp_path, state="state"):
    answer = run("bays", "--json", "--state", tmp_path / state).json
    return {drive["device"]: drive for drive in answer["drives"]}


def book(tmp_path, state="state"):
    entries = run("daybook", "--json", "--state", tmp_path / state).json["entries"]
    return [(entry["kind"], entry["text"]) for entry in entries]


def test_a_whole_workshop_of_recorded_drives_is_read_without_an_exception(tmp_path):
    command = lay_plan(tmp_path / "player")
    settings = settings_for(command, tmp_path, timeout="2s")
    ended = run("watch", "--once", "--state", tmp_path / "state", "--settings", settings)
    assert ended.code == 0, ended.err
    found = drives(tmp_path)
    read = [drive for drive in found.values() if drive["last_pass"]["outcome"] == "read"]
    assert len(read) >= 40
    assert {"nvme", "sas", "ssd", "hdd", "virtual"} <= {drive["kind"] for drive in found.values()}
    doomed = {drive["serial"]: drive for drive in read if drive["call"] in {"copy", "retire"}}
    assert {"INVENTED-BT-0001", "INVENTED-NW-0041", "INVENTED-KR-0011"} <= set(doomed)
    for drive in doomed.values():
        assert drive["cause"] is not None
        assert any(letter.isdigit() for letter in drive["reason"]), drive["reason"]


def test_each_drive_is_asked_by_one_process_and_a_pass(tmp_path):
    _, command = once(
        tmp_path,
        [
            {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_sister"},
            {"node": "/dev/inv2", "type": "scsi", "folder": "sas_hdd_0_issue_51"},
            {"node": "/dev/inv3", "type": "nvme", "folder": "invented_nvme_json"},
        ],
        json=True,
    )
    # This machine's own drives are asked too; the player knows nothing of them.
    asked = [call for call in calls(command) if "--all" in call.argv and call.argv[-1].startswith("/dev/inv")]
    assert sorted(call.argv[-1] for call in asked) == ["/dev/inv1", "/dev/inv2", "/dev/inv3"]
    assert all("-n" in call.argv for call in asked)
    assert not any(call.woke for call in calls(command))


def test_two_passes_with_a_rise_between_them_move_ledger_and_damage(tmp_path):
    command = lay(tmp_path / "player", [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_series"}])
    settings = settings_for(command, tmp_path)
    arguments = ("watch", "--once", "--state", tmp_path / "state", "--settings", settings)
    set_day(command, 1)
    assert run(*arguments).code == 0
    before = run("why", "inv1", "--json", "--state", tmp_path / "state").json
    set_day(command, 2)
    assert run(*arguments).code == 0
    after = run("why", "inv1", "--json", "--state", tmp_path / "state").json
    first, second = ({one["signal"]: one["latest"] for one in part["readings"]} for part in (before, after))
    rise = (
        second["pending-sectors"]
        - first["pending-sectors"]
        + second["reallocated-sectors"]
        - first["reallocated-sectors"]
    )
    assert rise > 0
    media_before, media_after = (
        next(one for one in part["evidence"] if one["stream"] == "media") for part in (before, after)
    )
    # Both passes lie on one day: the episode is the ledger's first step, and what the first pass foretold.
    assert media_after["days"] == pytest.approx(media_before["after_one_more"])
    assert media_after["episodes"] == 1
    assert after["damage"]["measure"] > before["damage"]["measure"] == 0
    assert after["drive"]["call"] in {"look", "copy", "retire"}


@pytest.mark.parametrize(
    ("drive", "outcome", "words"),
    [
        ({"asleep": True}, "asleep", "asleep"),
        ({"refused": True}, "refused", "root"),
        ({"garbage": True}, "garbled", "no answer that makes sense"),
        ({"hang": 60.0}, "timed-out", "no answer in 1 s"),
    ],
)
def test_a_drive_that_cannot_be_read_gets_one_clear_line_and_delays_no_other(tmp_path, drive, outcome, words):
    bad = {"node": "/dev/inv2", "type": "sat", "folder": "invented_hdd_failing", **drive}
    begun = time.monotonic()
    ended, command = once(tmp_path, [GOOD, bad], timeout="1s")
    assert time.monotonic() - begun < 15
    assert ended.code == 0
    found = drives(tmp_path)
    assert found["/dev/inv2"]["last_pass"]["outcome"] == outcome
    assert found["/dev/inv2"]["call"] is None
    assert found["/dev/inv1"]["call"] == "keep"
    assert sum(words in text for kind, text in book(tmp_path) if kind == "pass") == 1
    settings = settings_for(command, tmp_path, timeout="1s")
    ready = run("preflight", "--json", "--state", tmp_path / "state", "--settings", settings)
    lines = [check for check in ready.json["checks"] if check["name"] == "/dev/inv2"]
    assert [words in line["text"] for line in lines] == [True]
    assert ready.code == (0 if outcome == "asleep" else 4)


def test_a_missing_tool_is_one_line_in_the_day_book_and_the_kernels_drives_are_still_watched(tmp_path):
    settings = settings_for(tmp_path / "nowhere" / "smartctl", tmp_path)
    ended = run("watch", "--once", "--state", tmp_path / "state", "--settings", settings)
    assert ended.code in {0, 3}  # 3 on a machine that shows no drive at all
    troubles = [text for kind, text in book(tmp_path) if kind == "trouble"]
    assert len(troubles) == 1
    assert "install smartctl" in troubles[0]
    ready = run("preflight", "--state", tmp_path / "state", "--settings", settings)
    assert ready.code == 4
    assert ready.out.count("install smartctl") == 1


@pytest.mark.parametrize("stranger", ["true", "cat"])
def test_a_command_that_is_no_smartctl_is_said_and_moves_no_call(tmp_path, stranger):
    once(tmp_path, [GOOD])
    before = drives(tmp_path)
    settings = settings_for(shutil.which(stranger), tmp_path)
    for _ in range(UNREAD_LIMIT):
        ended = run("watch", "--once", "--state", tmp_path / "state", "--settings", settings)
        assert ended.code in {0, 3}  # 3 on a machine that shows no drive at all
        assert ended.err.count("does not answer as smartctl does") == 1
    after = drives(tmp_path)
    assert {name: one["call"] for name, one in after.items()} == {
        name: one["call"] for name, one in before.items()
    }
    assert after["/dev/inv1"]["last_pass"] == before["/dev/inv1"]["last_pass"]
    ready = run("preflight", "--json", "--state", tmp_path / "state", "--settings", settings)
    assert ready.code == 4
    assert [one["name"] for one in ready.json["checks"] if "does not answer" in one["text"]] == ["drives"]


def test_the_machine_begins_with_what_the_history_knows_of_its_adapters(tmp_path, monkeypatch):
    way = Way(adapter="1f75:0621", instance="boot 1, disk 7", type="sat")
    begun = []
    monkeypatch.setattr("diskwatch.cli.watch.RealMachine", lambda **words: begun.append(words["ways"]))
    machine(Settings(), tmp_path)
    with History.open(tmp_path) as history:
        history.record(Round(at=NOON, drives=(), ways=(way,)))
    machine(Settings(), tmp_path)
    (tmp_path / HISTORY).write_text("no history")
    machine(Settings(), tmp_path)
    assert begun == [(), (way,), ()]


def test_an_old_tool_that_knows_no_json_is_read_by_its_text(tmp_path):
    once(tmp_path, [GOOD], json=False, standby_status=False)
    assert drives(tmp_path)["/dev/inv1"]["last_pass"]["outcome"] == "read"


def test_a_history_that_cannot_be_written_does_not_silence_a_call(tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("a file where the folder should be")
    ended, _ = once(tmp_path, [{"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_failing"}])
    assert ended.code == 4
    assert "retire" in ended.out
    assert "not stored" in ended.err


def test_a_history_that_is_being_written_is_left_to_its_writer(tmp_path):
    command = lay(tmp_path / "player", [GOOD])
    settings = settings_for(command, tmp_path)
    with Watching(tmp_path, settings) as child:
        ended = run("watch", "--once", "--state", tmp_path / "state", "--settings", settings)
        assert ended.code == 4
        assert f"process {child.pid}" in ended.err
        assert ended.err.count("\n") == 1


def test_a_history_of_a_newer_version_is_left_untouched_by_every_command(tmp_path):
    once(tmp_path, [GOOD])
    path = tmp_path / "state" / "history.db"
    db = sqlite3.connect(path)
    db.execute("PRAGMA user_version = 999")
    db.commit()
    db.close()
    before = path.read_bytes()
    settings = settings_for(tmp_path / "player" / "smartctl", tmp_path)
    for words in (
        ("watch", "--once"),
        ("watch",),
        ("bays",),
        ("bays", "--json"),
        ("daybook",),
        ("why", "inv1"),
    ):
        ended = run(*words, "--state", tmp_path / "state", "--settings", settings)
        assert ended.code == 4, words
        assert ended.err.count("\n") == 1
    assert path.read_bytes() == before


def test_kill_9_at_any_moment_leaves_a_sound_file(tmp_path):
    command = lay_plan(tmp_path / "player")
    settings = settings_for(
        command, tmp_path, timeout="2s", more='every = "1s"\n[io]\nevery = "1s"\n[history]\ncommit = "1s"\n'
    )
    for number in range(6):
        child = subprocess.Popen(
            [*COMMAND, "watch", "--state", str(tmp_path / "state"), "--settings", str(settings)],
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
            cwd=ROOT,
        )
        time.sleep(0.6 + number * 0.31)
        child.send_signal(signal.SIGKILL)
        child.wait()
        path = tmp_path / "state" / "history.db"
        if path.exists():
            db = sqlite3.connect(path)
            assert db.execute("PRAGMA integrity_check").fetchone() == ("ok",)
            db.close()
    assert run("watch", "--once", "--state", tmp_path / "state", "--settings", settings).code == 0
    assert drives(tmp_path)


class Watching:
    """A watch that runs while a test does."""

    def __init__(self, tmp_path, settings, *words):
        self.state = tmp_path / "state"
        self.child = subprocess.Popen(
            [*COMMAND, "watch", *words, "--state", str(self.state), "--settings", str(settings)],
            stdin=subprocess.PIPE,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.PIPE,
            text=True,
            cwd=ROOT,
        )

    def __enter__(self):
        for _ in range(200):
            if watcher(self.state) is not None:
                return self.child
            time.sleep(0.05)
        raise AssertionError("the watch did not begin")

    def __exit__(self, *_):
        self.child.kill()
        self.child.wait()
        for pipe in (self.child.stdin, self.child.stderr):
            if pipe is not None:
                pipe.close()


def test_sigterm_ends_the_watch_in_time_with_everything_stored_even_while_a_drive_hangs(tmp_path):
    hanging = {"node": "/dev/inv2", "type": "sat", "folder": "invented_hdd_failing", "hang": 60.0}
    command = lay(tmp_path / "player", [GOOD, hanging])
    settings = settings_for(command, tmp_path, timeout="60s", more="")
    with Watching(tmp_path, settings) as child:
        for _ in range(200):
            if "/dev/inv1" in run("bays", "--state", tmp_path / "state").out:
                break
            time.sleep(0.1)
        begun = time.monotonic()
        child.terminate()
        assert child.wait(10) == 0
        assert time.monotonic() - begun < 3
    assert drives(tmp_path)["/dev/inv1"]["call"] == "keep"
    assert book(tmp_path)[-1][1] == "Watching ended."


def test_the_dashboards_child_ends_with_whoever_started_it(tmp_path):
    settings = settings_for(lay(tmp_path / "player", [GOOD]), tmp_path)
    with Watching(tmp_path, settings, "--tied") as child:
        child.stdin.close()
        assert child.wait(10) == 0


def test_the_history_can_be_read_by_everybody_and_written_by_its_owner_alone(tmp_path):
    once(tmp_path, [GOOD])
    assert stat.S_IMODE((tmp_path / "state" / "history.db").stat().st_mode) == 0o644


def test_a_listener_that_goes_away_silences_the_lines_and_not_the_watch(monkeypatch):
    said = []

    def gone(*words, **_options):
        said.append(words)
        raise BrokenPipeError

    monkeypatch.setattr("builtins.print", gone)
    voice = Voice()
    known = KnownDrive(number=1, drive=HDD, place=HERE, first_seen=NOON)
    part = (DriveRound(known=known, pass_=read(NOON), state=None),)
    voice.say(part)
    voice.say(part)
    assert len(said) == 1


def test_a_hangup_reads_the_settings_again_and_wrong_ones_leave_the_old_in_force(tmp_path):
    command = lay(tmp_path / "player", [GOOD])
    settings = settings_for(command, tmp_path, more='[watch]\nonly = ["/dev/inv1"]\n')
    err = tmp_path / "err"
    with err.open("w") as into:
        child = subprocess.Popen(
            [*COMMAND, "watch", "--state", str(tmp_path / "state"), "--settings", str(settings)],
            cwd=ROOT,
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=into,
        )

    def until(what):
        over = time.monotonic() + 20
        while not what():
            assert time.monotonic() < over
            time.sleep(0.05)

    def begun(times):
        with suppress(OSError, ValueError, sqlite3.Error):
            return [text for _, text in book(tmp_path)].count("Watching began.") == times
        return False

    until(lambda: (tmp_path / "state").exists() and begun(1) and drives(tmp_path))
    good = settings.read_text()
    settings.write_text(good + "[io]\nevery = 3\n")
    child.send_signal(signal.SIGHUP)
    until(lambda: "the settings that held before go on" in err.read_text())
    settings.write_text(good + '[io]\nevery = "1s"\n')
    child.send_signal(signal.SIGHUP)
    until(lambda: begun(2))
    asked = time.monotonic()
    child.send_signal(signal.SIGTERM)
    assert child.wait(10) == 0
    assert time.monotonic() - asked < 3
    assert len(err.read_text().splitlines()) == 1


def test_no_real_drive_is_watched_into_a_rehearsal(tmp_path):
    state = tmp_path / "invented"
    assert run("rehearse", "loose-cable", "--days", "1", "--headless", "--state", str(state)).code == 0
    before = (state / HISTORY).read_bytes()
    refused = run("watch", "--once", "--state", str(state))
    assert refused.code == 2
    assert "keeps a rehearsal, whose drives are invented" in refused.err
    assert (state / HISTORY).read_bytes() == before
