"""What the jobs in the guest share: commands, checks, and a smartctl that counts how often it is started."""

import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from diskwatch.history.reader import Past
from diskwatch.machine.real import RealMachine
from diskwatch.records import DriveRound, Entry
from diskwatch.service.keeper import Keeper
from diskwatch.service.rounds import Rounds
from diskwatch.service.turns import Turns

BEGAN = time.monotonic()
HERE = Path(tempfile.mkdtemp(prefix="bench-"))
_failed: list[str] = []


def sh(command: str, *, check: bool = True) -> str:
    """What a shell command prints."""
    done = subprocess.run(["/bin/sh", "-c", command], capture_output=True, text=True, check=False)
    if check and done.returncode:
        raise RuntimeError(f"{command}: {done.returncode}: {done.stderr}")
    return done.stdout.strip()


def lab(*words: str) -> str:
    """Ask the guest's own tool to make a disk misbehave."""
    done = subprocess.run(["lab", *words], capture_output=True, text=True, check=True)
    return done.stdout.strip()


def say(text: str) -> None:
    """A line of what was seen, with the seconds since the job began."""
    sys.stdout.write(f"{time.monotonic() - BEGAN:7.1f}  {text}\n")
    sys.stdout.flush()


def check(ok: object, sentence: str) -> None:
    """Note whether a sentence about what was seen holds."""
    say(f"{'yes' if ok else 'NO '}  {sentence}")
    if not ok:
        _failed.append(sentence)


def wait(what: str, until: Callable[[], object], seconds: float = 30.0) -> float:
    """Wait for something to come true; says how long that took."""
    begun = time.monotonic()
    while not until():
        if time.monotonic() - begun > seconds:
            check(ok=False, sentence=f"{what} within {seconds:.0f} s")
            break
        time.sleep(0.2)
    return time.monotonic() - begun


def end() -> None:
    """Leave with 1 where a check failed."""
    say(f"{len(_failed)} checks failed")
    sys.exit(1 if _failed else 0)


class Smartctl:
    """A smartctl that keeps count."""

    def __init__(self) -> None:
        self._log = HERE / "started"
        self.command = HERE / "smartctl"
        self.command.write_text(f'#!/bin/sh\nprintf "%s\\n" "$*" >>{self._log}\nexec smartctl "$@"\n')
        self.command.chmod(0o755)

    def started(self) -> list[str]:
        """What it was asked since this was last called, scans left out."""
        lines = self._log.read_text().splitlines() if self._log.exists() else []
        self._log.write_text("")
        return [line for line in lines if not line.startswith("--scan")]


class Bench:
    """Rounds over this machine into a history of their own, one at a call."""

    def __init__(self, name: str, *, only: tuple[str, ...] = (), turns: Turns | None = None) -> None:
        self.smartctl = Smartctl()
        self.folder = HERE / name
        self.machine = RealMachine(command=str(self.smartctl.command), timeout=20.0, only=only)
        self.all: tuple[DriveRound, ...] = ()
        """All of the last round, also drives that tell the same serial."""
        self._keeper = Keeper(self.folder)
        self._rounds = Rounds(self.machine, self._keeper, lambda: int(time.time()), turns=turns)

    def round(self) -> dict[str, DriveRound]:
        """One round: what came of each drive, by its serial or else its device."""
        done = self._rounds.run()
        self.all = done
        return {one.known.drive.identity.serial or one.known.place.device: one for one in done}

    def book(self) -> list[Entry]:
        """The day book."""
        with Past.open(self.folder) as past:
            return list(past.day_book())
