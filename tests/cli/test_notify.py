import json
import os
import signal
import subprocess
import sys

import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.history.writer import History
from diskwatch.notices.guard import alone
from diskwatch.records import DriveRound, KnownDrive, Round
from tests.cli.run import COMMAND, ROOT, run
from tests.notices.bus import ALL, bus_in, needs_bus, server_on, until
from tests.notices.samples import call
from tests.samples import HDD, HERE, NOON, read

WRITE = "import sys; open(sys.argv[1], 'a').write(sys.stdin.read())"


def called(folder, word, at=NOON):
    """Write a history in which the drive has a call; nobody watches it."""
    with History.open(folder) as history:
        known = KnownDrive(number=1, drive=HDD, place=HERE, first_seen=NOON)
        pass_ = read(at, pending_sectors=8)
        one = DriveRound(known=known, pass_=pass_, state="{}", findings=(), evidence={}, call=call(word, at=at))
        history.record(Round(at=at, drives=(one,)))


@pytest.fixture
def bus(tmp_path):
    with bus_in(tmp_path) as bus:
        yield bus


@pytest.fixture
def settings(tmp_path):
    path = tmp_path / "settings.toml"
    command = [sys.executable, "-c", WRITE, str(tmp_path / "handed")]
    path.write_text(f'[notices]\ncommand = {json.dumps(command)}\nterminal = ["true"]\n')
    return path


class Agent:
    """The command, running."""

    def __init__(self, tmp_path, *words, bus=None):
        env = {**os.environ, "XDG_STATE_HOME": str(tmp_path / "own")}
        env.pop("DBUS_SESSION_BUS_ADDRESS", None)
        if bus is not None:
            env["DBUS_SESSION_BUS_ADDRESS"] = bus.address
        self.err = tmp_path / "err"
        self.own = tmp_path / "own" / "diskwatch"
        with self.err.open("a") as err:
            self.child = subprocess.Popen(
                [*COMMAND, "notify", "--state", str(tmp_path / "state"), *map(str, words)],
                cwd=ROOT,
                env=env,
                stdin=subprocess.DEVNULL,
                stderr=err,
            )

    def at_work(self):
        """Wait until it is the agent of its user."""

        def held():
            try:
                with alone(self.own):
                    return False
            except DiskwatchError:
                return True

        until(held)

    def end(self, number=signal.SIGTERM):
        self.child.send_signal(number)
        return self.child.wait(10)


@needs_bus
def test_a_call_is_on_the_screen_and_with_the_program_once_over_a_restart(tmp_path, bus, settings):
    called(tmp_path / "state", "copy")
    handed = tmp_path / "handed"
    with server_on(bus, *ALL) as server:
        agent = Agent(tmp_path, "--settings", settings, bus=bus)
        until(lambda: server.shown() and handed.exists() and handed.read_text().endswith("\n"))
        assert agent.end() == 0
        agent = Agent(tmp_path, "--settings", settings, bus=bus)
        agent.at_work()
        agent.child.send_signal(signal.SIGHUP)
        until(lambda: "were read again" in agent.err.read_text())
        assert agent.end(signal.SIGINT) == 0
        (shown,) = server.shown()
    assert shown["summary"].startswith("Copy the data off Nordwall")
    (told,) = map(json.loads, handed.read_text().splitlines())
    assert (told["drive"]["serial"], told["drive"]["call"]) == ("INV0001", "copy")
    assert "Traceback" not in agent.err.read_text()


@needs_bus
def test_the_button_on_the_screen_puts_the_drive_off(tmp_path, bus):
    called(tmp_path / "state", "look")
    with server_on(bus, *ALL) as server:
        agent = Agent(tmp_path, bus=bus)
        (shown,) = until(server.shown)
        server.say(f"choose {shown['number']} later")
        until((tmp_path / "own" / "diskwatch" / "later.json").exists)
        assert agent.end() == 0


def test_without_a_session_bus_one_line_says_so_and_the_agent_stays(tmp_path):
    called(tmp_path / "state", "keep")
    agent = Agent(tmp_path)
    until(lambda: "there is no session bus here" in agent.err.read_text())
    assert agent.child.poll() is None
    assert agent.end() == 0
    assert len(agent.err.read_text().splitlines()) == 1


def test_wrong_settings_leave_the_old_ones_in_force(tmp_path, settings):
    called(tmp_path / "state", "keep")
    agent = Agent(tmp_path, "--no-desktop", "--settings", settings)
    agent.at_work()
    settings.write_text("[notices]\nquiet = 3\n")
    agent.child.send_signal(signal.SIGHUP)
    until(lambda: "the settings that held before go on" in agent.err.read_text())
    assert agent.end() == 0


@needs_bus
def test_a_trial_notice_is_sent_and_said(tmp_path, bus, settings):
    env = {"DBUS_SESSION_BUS_ADDRESS": bus.address}
    with server_on(bus, *ALL) as server:
        ended = run("notify", "--try", "--settings", settings, env=env)
        (shown,) = server.shown()
    assert (ended.code, ended.err) == (0, "")
    assert ended.out == "A trial notice was handed to the desktop and to the owner's program.\n"
    assert shown["summary"] == "A trial notice of diskwatch"
    assert json.loads((tmp_path / "handed").read_text())["about"] == "trial"


def test_a_trial_without_any_way_to_a_person_ends_with_3_or_4_and_one_line():
    ended = run("notify", "--try", env={"DBUS_SESSION_BUS_ADDRESS": ""})
    assert ended.code == 4
    assert ended.err.count("\n") == 1
    assert "no session bus" in ended.err
    assert run("notify", "--try", "--no-desktop").code == 3


def test_a_trial_with_a_program_that_fails_ends_with_4(tmp_path):
    settings = tmp_path / "settings.toml"
    settings.write_text('[notices]\ncommand = ["false"]\n')
    ended = run("notify", "--try", "--no-desktop", "--settings", settings)
    assert (ended.code, ended.out) == (4, "")
    assert "the command false ended with 1" in ended.err


def test_a_second_agent_of_the_same_user_is_refused(tmp_path):
    called(tmp_path / "state", "keep")
    agent = Agent(tmp_path, "--no-desktop")
    agent.at_work()
    ended = run(
        "notify", "--no-desktop", "--state", tmp_path / "state", env={"XDG_STATE_HOME": str(tmp_path / "own")}
    )
    assert (ended.code, ended.err.count("\n")) == (4, 1)
    assert agent.end() == 0
