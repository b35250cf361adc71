"""A real session bus of the test's own, and on it a mock server that writes down what it is asked.

The server is a process of its own (``python -m tests.notices.bus LOG CAPABILITY...``): the agent meets it as
it meets any other. It answers to the Desktop Notifications Specification, and to these words on standard input:
``choose NUMBER ACTION`` sends ActionInvoked, ``refuse`` makes it answer with errors, ``silent`` with nothing.
"""

import json
import os
import select
import shutil
import subprocess
import sys
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

import pytest
from jeepney import (
    DBusAddress,
    HeaderFields,
    Message,
    MessageType,
    message_bus,
    new_error,
    new_method_return,
    new_signal,
)
from jeepney.io.blocking import open_dbus_connection

ROOT = Path(__file__).resolve().parents[2]
NAME = "org.freedesktop.Notifications"
PLACE = DBusAddress("/org/freedesktop/Notifications", bus_name=NAME, interface=NAME)
ALL = ("actions", "body", "body-markup")

# No folders of services: nothing that happens to be installed here is started by asking.
_CONFIG = """<busconfig>
  <type>session</type>
  <listen>{address}</listen>
  <policy context="default">
    <allow send_destination="*"/>
    <allow receive_sender="*"/>
    <allow own="*"/>
  </policy>
</busconfig>
"""

needs_bus = pytest.mark.skipif(
    shutil.which("dbus-daemon") is None, reason="dbus-daemon is not installed here (on Debian: dbus)"
)


def until(what, seconds=15.0):
    """Wait for something to come true."""
    over = time.monotonic() + seconds
    while not (found := what()):
        assert time.monotonic() < over, "it did not come true in time"
        time.sleep(0.02)
    return found


class Bus:
    """A session bus."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.address = f"unix:path={folder}/bus"
        self._daemon: subprocess.Popen[bytes] | None = None

    def start(self) -> None:
        """Begin; the address is always the same."""
        (self.folder / "bus").unlink(missing_ok=True)
        (self.folder / "bus.conf").write_text(_CONFIG.format(address=self.address))
        self._daemon = subprocess.Popen(
            ["dbus-daemon", f"--config-file={self.folder}/bus.conf", "--nofork", "--nopidfile"],
            stderr=subprocess.DEVNULL,
        )
        until((self.folder / "bus").exists)

    def stop(self) -> None:
        """End, with all connections."""
        if self._daemon is not None:
            self._daemon.terminate()
            self._daemon.wait(10)


class Server:
    """The mock."""

    def __init__(self, bus: Bus, log: Path, capabilities: Sequence[str]) -> None:
        self._log = log
        log.write_text("")
        self.child = subprocess.Popen(
            [sys.executable, "-m", "tests.notices.bus", str(log), *capabilities],
            env={**os.environ, "DBUS_SESSION_BUS_ADDRESS": bus.address},
            cwd=ROOT,
            stdin=subprocess.PIPE,
            text=True,
        )
        until(lambda: "ready" in log.read_text())

    def shown(self):
        """What it was asked to show."""
        return [json.loads(line) for line in self._log.read_text().splitlines() if line.startswith("{")]

    def say(self, words: str) -> None:
        """Tell it to do something; comes back when it has."""
        assert self.child.stdin is not None
        before = self._log.read_text().count("did")
        self.child.stdin.write(words + "\n")
        self.child.stdin.flush()
        until(lambda: self._log.read_text().count("did") > before)

    def end(self) -> None:
        """Leave the bus."""
        assert self.child.stdin is not None
        self.child.stdin.close()
        self.child.wait(10)


@contextmanager
def bus_in(folder: Path) -> Iterator[Bus]:
    """A bus that runs."""
    bus = Bus(folder)
    bus.start()
    try:
        yield bus
    finally:
        bus.stop()


@contextmanager
def server_on(bus: Bus, *capabilities: str, log: str = "log") -> Iterator[Server]:
    """A server on it."""
    server = Server(bus, bus.folder / log, capabilities)
    try:
        yield server
    finally:
        server.end()


class _Mock:
    """What the server's process does."""

    def __init__(self, log: Path, capabilities: list[str]) -> None:
        self._log, self._capabilities = log, capabilities
        self._bus = open_dbus_connection()
        self._mood, self._number = "well", 0

    def serve(self) -> None:
        """Answer until standard input ends."""
        self._bus.send_and_get_reply(message_bus.RequestName(NAME))
        self._note("ready")
        waited = select.poll()
        for one in (self._bus.sock, sys.stdin):
            waited.register(one, select.POLLIN | select.POLLHUP)
        while True:
            for found, _ in waited.poll():
                if not (self._obey() if found == sys.stdin.fileno() else self._answer_all()):
                    return

    def _note(self, text: str) -> None:
        with self._log.open("a") as file:
            file.write(text + "\n")

    def _obey(self) -> bool:
        match sys.stdin.readline().split():
            case []:
                return False
            case ["choose", which, action]:
                self._bus.send(new_signal(PLACE, "ActionInvoked", "us", (int(which), action)))
            case [word]:
                self._mood = word
        self._note("did")
        return True

    def _answer_all(self) -> bool:
        while True:
            try:
                message = self._bus.receive(timeout=0)
            except TimeoutError:
                return True
            except OSError:
                return False
            if message.header.message_type is MessageType.method_call:
                self._answer(message, message.header.fields[HeaderFields.member])

    def _answer(self, message: Message, member: str) -> None:
        if self._mood == "silent" and member == "Notify":
            self._note(json.dumps({"silent": True}))
        elif self._mood == "refuse":
            self._bus.send(new_error(message, "org.example.Refused", "s", ("not \x1b[31mtoday",)))
        elif member == "GetCapabilities":
            self._bus.send(new_method_return(message, "as", (self._capabilities,)))
        elif member == "Notify":
            app, replaces, _icon, summary, body, actions, hints, _expire = message.body
            self._number = replaces or self._number + 1
            kind, urgency = hints["urgency"]
            told = {"app": app, "replaces": replaces, "number": self._number, "summary": summary, "body": body}
            self._note(json.dumps({**told, "actions": actions, "urgency": urgency, "type": kind}))
            self._bus.send(new_method_return(message, "u", (self._number,)))


if __name__ == "__main__":
    _Mock(Path(sys.argv[1]), sys.argv[2:]).serve()
