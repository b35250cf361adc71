"""The watch of the jobs `senses` and `losses`, and what it told of the lab's disks."""

import os
import subprocess
import sys
import time

from diskwatch.errors import DiskwatchError
from diskwatch.history.reader import Past
from diskwatch.records import DriveLine, Entry
from tests.lab.bench import HERE, check, end, say, wait

SETTINGS = """
[smart]
every = "20m"
timeout = "30s"
"""
SERIALS = {
    "hdd": "LABHDD0001",
    "ssd": "LABSSD0001",
    "nvme": "LABNVME001",
    "usb": "LABUSB0001",
    "vblk": "LABVBLK001",
    "scsi": "LABSAS0001",
}


class Watching:
    """The service itself, in a process of its own."""

    def __init__(self) -> None:
        self.folder = HERE / "senses"
        self.settings = HERE / "senses.toml"
        self.settings.write_text(SETTINGS)
        self.start()

    def start(self) -> None:
        """Begin to watch."""
        state = ["--state", str(self.folder), "--settings", str(self.settings)]
        self.process = subprocess.Popen(
            [sys.executable, "-m", "diskwatch", "watch", *state],
            env=dict(os.environ),
            stdout=subprocess.DEVNULL,
        )

    def stop(self) -> None:
        """End it well."""
        self.process.terminate()
        check(self.process.wait(30) == 0, "the watch ends well")

    def lines(self) -> dict[str, DriveLine]:
        """The drives by their serials."""
        try:
            with Past.open(self.folder) as past:
                return {line.drive.identity.serial or "": line for line in past.bays(int(time.time())).drives}
        except DiskwatchError:
            return {}

    def events(self) -> list[tuple[str, Entry]]:
        """What the kernel told, oldest first, each with the serial of its drive."""
        serials = {line.number: serial for serial, line in self.lines().items()}
        with Past.open(self.folder) as past:
            entries = [entry for entry in past.day_book() if entry.kind == "kernel"]
        return [
            (serials.get(entry.drive or 0, "?"), entry) for entry in sorted(entries, key=lambda one: one.at)
        ]

    def told(self, name: str, event: str) -> list[Entry]:
        """Events of one kind of one disk."""
        return [
            entry for serial, entry in self.events() if serial == SERIALS[name] and entry.data["event"] == event
        ]

    def call(self, name: str) -> tuple[str, str]:
        """A disk's call and the rule behind it."""
        call = self.lines()[SERIALS[name]].call
        return (call.word.value, call.rule) if call is not None else ("none", "")

    def signals(self, name: str) -> dict[str, object]:
        """A disk's signals by name."""
        return {one.name: one.value for one in self.lines()[SERIALS[name]].signals}


def watching() -> Watching:
    """A watch that has met every disk once; an emulated machine beside others may take minutes."""
    made = Watching()
    wait("the first round", lambda: _all_met(made), 300)
    return made


def _all_met(made: Watching) -> bool:
    lines = made.lines()
    return lines.keys() >= set(SERIALS.values()) and lines[SERIALS["ssd"]].call is not None


def ended(made: Watching) -> None:
    """End the watch, say all that was heard, and end the job."""
    made.stop()
    for serial, entry in made.events():
        say(f"       {serial}: {entry.text}")
    end()
