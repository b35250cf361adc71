import os
import signal
import subprocess
import time
from typing import Any

import pytest

from diskwatch.cli import main, point
from diskwatch.history.writer import History
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.real import RealMachine
from diskwatch.records import CallWord, Identity, Kind, Outcome, Pass, Place
from tests.cli.run import COMMAND, ROOT, run
from tests.history.examples import NOON, a_call, a_drive, a_part, a_pass, a_round


def drive(number, kind=Kind.HDD):
    who = Identity(wwn=None, model="Aldertree 4000", serial=f"INV-{number}", path=f"/dev/inv{number}")
    return a_drive(identity=who, kind=kind)


def found(number, kind=Kind.HDD):
    node = f"/dev/inv{number}"
    return Found(
        address=Address(node=node),
        blocks=(f"inv{number}",),
        place=Place(device=node),
        drive=drive(number, kind),
    )


@pytest.fixture
def state(tmp_path):
    """Drives 1 and 2 called keep, 3 copy, 4 without a call."""
    folder = tmp_path / "state"
    with History.open(folder) as history:
        for number, word in ((1, CallWord.KEEP), (2, CallWord.KEEP), (3, CallWord.COPY), (4, None)):
            node = f"/dev/inv{number}"
            known = history.admit(drive(number), Place(device=node, bay=f"ata-{number}"), NOON)
            if word is not None:
                history.record(a_round(a_part(known, a_pass(NOON + number), call=a_call(word))))
        history.tell(1, {"label": "left bay"}, NOON)
    return folder


@pytest.fixture
def machine(monkeypatch):
    """This machine with those drives, and what was done to them: asked, made to blink."""
    done: dict[str, Any] = {"asked": [], "blinked": [], "outcomes": {}, "readable": True, "here": [1, 2, 3, 4]}

    def ask(_, one):
        done["asked"].append(one.place.device)
        return Pass(at=NOON, outcome=done["outcomes"].get(one.place.device, Outcome.READ))

    def blink(lamps, *_):
        done["blinked"] += [str(lamp.node) for lamp in lamps]
        if (ended := done.get("ended")) is not None:
            raise ended
        return done.get("wrong", {})

    monkeypatch.setattr(point, "physical_drives", lambda: tuple(found(number) for number in done["here"]))
    monkeypatch.setattr(RealMachine, "ask", ask)
    monkeypatch.setattr(point, "blink", blink)
    monkeypatch.setattr(os, "access", lambda *_: done["readable"])
    return done


def pointed(state, *words):
    return main(["point", *words, "--state", str(state)])


def test_a_drive_called_keep_blinks_itself(state, machine, capsys):
    assert pointed(state, "inv1") == 0
    told = capsys.readouterr().out
    for words in ("left bay", "INV-1", "ata-1", "Its light blinks for 30 seconds"):
        assert words in told
    assert machine["asked"] == machine["blinked"] == ["/dev/inv1"]


@pytest.mark.parametrize("number", [3, 4])
def test_a_drive_in_doubt_is_neither_asked_nor_read_and_the_others_blink(state, machine, capsys, number):
    assert pointed(state, f"inv{number}") == 0
    told = " ".join(capsys.readouterr().out.split())
    assert sorted(machine["blinked"]) == ["/dev/inv1", "/dev/inv2"]
    assert f"/dev/inv{number}" not in machine["asked"]
    assert "it is not read for this: the lights of the others blink instead" in told
    assert f"(/dev/inv{7 - number}) stays dark: it is not called keep" in told


def test_a_drive_that_sleeps_is_not_woken(state, machine, capsys):
    machine["outcomes"]["/dev/inv1"] = Outcome.ASLEEP
    assert pointed(state, "inv1") == 0
    assert machine["blinked"] == []
    assert "it is asleep, and is not woken for this" in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize("outcome", [Outcome.TIMED_OUT, Outcome.NO_TOOL, Outcome.GARBLED, Outcome.REFUSED])
def test_a_drive_that_does_not_say_whether_it_is_awake_is_left_alone(state, machine, outcome):
    machine["outcomes"]["/dev/inv1"] = outcome
    assert pointed(state, "inv1") == 0
    assert machine["blinked"] == []


def test_without_the_right_to_read_it_is_described_and_ends_with_4(state, machine, capsys):
    machine["readable"] = False
    machine["outcomes"]["/dev/inv1"] = Outcome.REFUSED
    assert pointed(state, "inv1") == 4
    told = capsys.readouterr()
    assert "INV-1" in told.out
    assert "run as root" in told.err
    assert machine["blinked"] == []


def test_a_drive_that_is_not_here_is_described_and_nothing_blinks(state, machine, capsys):
    machine["here"] = [2]
    assert pointed(state, "inv1") == 0
    assert "not plugged in here now" in capsys.readouterr().out
    assert machine["asked"] == machine["blinked"] == []


def test_ctrl_c_is_the_usual_end(state, machine, capsys):
    machine["ended"] = KeyboardInterrupt()
    assert pointed(state, "inv1") == 0
    assert capsys.readouterr().out.endswith("Ended.\n")


def test_a_light_that_could_not_be_kept_blinking_is_named(state, machine, capsys):
    machine["wrong"] = {"/dev/inv1": OSError(5, "Input/output error")}
    assert pointed(state, "inv1") == 0
    assert "/dev/inv1 could not be read: Input/output error" in " ".join(capsys.readouterr().out.split())


def test_a_virtual_disk_has_no_light(state, machine, capsys):
    with History.open(state) as history:
        history.admit(drive(5, Kind.VIRTUAL), Place(device="/dev/inv5"), NOON)
    machine["here"] = [1, 5]
    assert pointed(state, "inv5") == 0
    assert "A virtual disk has no light." in capsys.readouterr().out
    assert machine["asked"] == machine["blinked"] == []


def test_no_time_to_blink_only_describes(state, machine):
    assert pointed(state, "inv1", "--seconds", "0") == 0
    assert machine["asked"] == machine["blinked"] == []


@pytest.mark.parametrize("seconds", ["-1", "301", "long"])
def test_a_time_that_is_not_possible_is_wrong_usage(state, machine, seconds):
    assert pointed(state, "inv1", f"--seconds={seconds}") == 2
    assert machine["blinked"] == []


def test_the_command_itself_names_a_drive_that_is_long_gone(state):
    ended = run("point", "INV-1", "--state", state)
    assert ended.code == 0
    assert "not plugged in here now" in ended.out
    assert run("point", "nobody", "--state", state).code == 2
    assert run("point", "INV-1", "--state", state / "none").code == 3


def test_ctrl_c_ends_the_real_command_without_a_word_on_standard_error(state):
    code = (
        "import sys, time; from diskwatch.cli import point, main; from tests.cli.test_point import found;"
        "from diskwatch.records import Outcome, Pass; import os; os.access = lambda *_: True;"
        "point.physical_drives = lambda: (found(1),);"
        "point.RealMachine.ask = lambda *_: Pass(at=1, outcome=Outcome.READ);"
        "point.blink = lambda *_: time.sleep(60) or {};"
        f"sys.exit(main(['point', 'inv1', '--state', {str(state)!r}]))"
    )
    with subprocess.Popen(
        [COMMAND[0], "-c", code], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, cwd=ROOT
    ) as child:
        assert child.stdout is not None
        while "Ctrl-C" not in (line := child.stdout.readline()):
            assert line, "it ended before it blinked"
        time.sleep(0.2)
        child.send_signal(signal.SIGINT)
        out, err = child.communicate(timeout=20)
    assert (child.returncode, err) == (0, "")
    assert out.endswith("Ended.\n")
