"""Disks whose writes fail, and disks that say of writes that they are done and lose them.

* Where writes fail, rounds that are reported as stored must be there afterwards; the others must be refused.
* No program can keep its word on a disk that loses what it said to have flushed. What is asked there is that a
  watch goes on; how often what was lost is told, is told.
"""

import random
import sqlite3
import time
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.history.care import check as look_through
from diskwatch.history.rescue import rescue
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from tests.lab.bench import HERE, check, end, lab, say, sh
from tests.lab.load import Load, a_round, known_of, passes

TURNS = 8
MIB = 48


def begun(folder: Path) -> None:
    """A history with its first round."""
    with History.open(folder) as history:
        history.record(a_round(known_of(history), 0))


class Flakey:
    """A disk of device-mapper that can be told to misbehave, with a file system on it."""

    def __init__(self, name: str, node: str) -> None:
        self.name, self._node = name, node
        self.place = HERE / name
        self.place.mkdir()
        sh(f"dmsetup create {name} --table '{self._table('linear', '')}'")
        sh(f"mkfs.ext4 -q -E nodiscard,lazy_itable_init=0,lazy_journal_init=0 /dev/mapper/{name} {MIB}m")
        self.mount()

    def _table(self, target: str, rest: str) -> str:
        return f"0 {MIB * 2048} {target} {self._node} 0 {rest}"

    def mount(self) -> None:
        """Mount it where it belongs."""
        sh(f"mount -o errors=remount-ro /dev/mapper/{self.name} {self.place}")

    def turn(self, target: str, rest: str = "") -> None:
        """Another behaviour from now on; --nolockfs: nothing is flushed first, as no power cut does."""
        sh(
            f"dmsetup suspend --nolockfs --noflush {self.name}; "
            f"dmsetup load {self.name} --table '{self._table(target, rest)}'; dmsetup resume {self.name}"
        )

    def power_cycle(self) -> None:
        """Forget all that was not written, and look at the disk anew."""
        self.turn("flakey", "0 9999 1 error_writes")
        sh(f"umount {self.place} || umount -l {self.place}", check=False)
        sh(f"blockdev --flushbufs /dev/mapper/{self.name}; echo 3 >/proc/sys/vm/drop_caches", check=False)
        self.turn("linear")
        sh(f"e2fsck -fy /dev/mapper/{self.name}", check=False)
        self.mount()


def disk_whose_writes_fail() -> None:
    """EIO from some moment on, again and again."""
    disk = Flakey("failing", lab("dev", "ssd"))
    when = random.Random(4)  # noqa: S311  # moments, not secrets
    begun(disk.place / "state")
    stored, problems = 1, []
    for _ in range(TURNS):
        load = Load(disk.place / "state", stored)
        time.sleep(when.uniform(1, 4))
        disk.turn("flakey", "0 9999 1 error_writes")
        time.sleep(0.5)
        promised = load.kill()
        disk.power_cycle()
        try:
            found = passes(disk.place / "state")
            if found < promised:
                problems.append(f"{found} rounds of {promised}")
            stored = found
        except (AssertionError, DiskwatchError, sqlite3.Error) as error:
            problems.append(f"{type(error).__name__}: {error}")
            break
    say(f"       {stored} rounds stored {problems}")
    check(not problems, f"writes fail {TURNS} times: all that was stored is there, whole")


def disk_that_lies() -> None:
    """Writes that are dropped in silence, flushes and all."""
    node = lab("dev", "hdd")
    when = random.Random(5)  # noqa: S311  # moments, not secrets
    seen = {"whole": 0, "rounds lost": 0, "damage told": 0, "not told": 0, "not mended": 0}
    for turn in range(TURNS):
        disk = Flakey(f"lying{turn}", node)
        folder = disk.place / "state"
        begun(folder)
        load = Load(folder, 1)
        time.sleep(when.uniform(2, 4))
        before = load.told()
        disk.turn("flakey", "0 9999 1 drop_writes")
        time.sleep(when.uniform(0.5, 2))
        if turn % 2:
            disk.turn("linear")  # what follows is written again, over a hole
            time.sleep(when.uniform(0.3, 1))
        promised = load.kill()
        disk.power_cycle()
        say(f"       {before} rounds when it began to lie, {promised} when the power failed")
        try:
            found = passes(folder)
            seen["whole" if found >= promised else "rounds lost"] += 1
        except AssertionError as error:
            # Did the program itself see it, as a watch does that looks through the file?
            told = damage_told(folder)
            seen["damage told" if told else "not told"] += 1
            say(f"       {error}: told {told}")
        except (DiskwatchError, sqlite3.Error) as error:
            seen["damage told"] += 1
            say(f"       {type(error).__name__}: {error}")
            try:
                rescue(folder, int(time.time()))
                with History.open(folder) as history:
                    known_of(history)
            except DiskwatchError as again:
                seen["not mended"] += 1
                say(f"       {again}")
        sh(f"umount {disk.place}; dmsetup remove {disk.name}")
    say(f"       {seen}")
    check(not seen["not mended"], "after what a lying disk damaged, a watch goes on")


def damage_told(folder: Path) -> bool:
    """Whether looking through the file tells of damage."""
    return bool(look_through(folder / HISTORY, thorough=True, stop=lambda: False).damage)


def main() -> None:
    """Both."""
    disk_whose_writes_fail()
    disk_that_lies()
    end()


main()
