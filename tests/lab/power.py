"""Power that fails under load, on a disk that keeps what it was told to flush.

A log of all writes to the disk is replayed up to any moment; of what came after the last flush a part is lost
at random, as from a cache in the disk. Every round reported as stored must be there, the file sound, and the
next watch must go on in it.
"""

import random
import sqlite3
import struct
import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO

from diskwatch.errors import DiskwatchError
from diskwatch.history.writer import History
from tests.lab.bench import HERE, check, end, lab, say, sh
from tests.lab.load import Load, a_round, goes_on, known_of, passes

SECONDS = 40.0
MOMENTS = 60
MIB = 48
_SECTOR = 512
_FLUSH, _FUA, _DISCARD, _MARK = 1, 2, 4, 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Write:
    """One entry of the log of writes: what was written where, in sectors of 512 bytes; a mark has its words."""

    sector: int
    flags: int
    data: bytes
    mark: str


def entries(device: str) -> Iterator[Write]:
    """All entries of a log, in the order in which the writes were done.

    Source: Linux, Documentation/admin-guide/device-mapper/log-writes.rst and drivers/md/dm-log-writes.c.
    """
    with Path(device).open("rb") as log:
        _, version, count, size = struct.unpack("<QQQI", log.read(28))
        assert version == 1
        place = 1
        for _ in range(count):
            log.seek(place * size)
            head = log.read(size)
            sector, sectors, flags, length = struct.unpack("<QQQQ", head[:32])
            mark = head[32 : 32 + length].rstrip(b"\0").decode() if flags & _MARK else ""
            data = b"" if flags & (_DISCARD | _MARK) else log.read(sectors * size)
            yield Write(sector=sector * size // _SECTOR, flags=flags, data=data, mark=mark)
            place += 1 + (0 if flags & _DISCARD else sectors)


def main() -> None:
    """Load, then any moment of it, with all or half of what no flush had reached."""
    data, log = lab("dev", "vblk"), lab("dev", "nvme")
    sectors = MIB * 2048
    sh("modprobe dm-log-writes")
    sh(f"dmsetup create logged --table '0 {sectors} log-writes {data} {log}'")
    place = HERE / "logged"
    place.mkdir()
    sh(f"mkfs.ext4 -q -E nodiscard,lazy_itable_init=0,lazy_journal_init=0 /dev/mapper/logged {MIB}m")
    sh(f"mount -o nodiscard /dev/mapper/logged {place}")
    folder = place / "state"
    with History.open(folder) as history:
        known_of(history)
        history.record(a_round(known_of(history), 0))
    sh("dmsetup message logged 0 mark 1")
    load = Load(folder, 1)
    until, marked = time.monotonic() + SECONDS, 1
    while time.monotonic() < until:
        if (told := load.told()) > marked:
            marked = told
            sh(f"dmsetup message logged 0 mark {marked}")
        time.sleep(0.002)
    stored = load.kill()
    sh(f"umount {place}; dmsetup remove logged")
    written = list(entries(log))
    begun = next(index for index, one in enumerate(written) if one.mark == "1")
    flushes = sum(1 for one in written if one.flags & (_FLUSH | _FUA))
    say(f"       {stored} rounds stored; {len(written)} writes logged, {flushes} of them flush")
    when = random.Random(3)  # noqa: S311  # moments, not secrets
    moments = sorted(when.sample(range(begun + 1, len(written)), min(MOMENTS, len(written) - begun - 1)))
    for share in (0.0, 0.5):
        found = [looked_at(image, promised) for image, promised in afterwards(written, moments, share, when)]
        how = f"power cut at {len(found)} moments, {share:.0%} of what was not flushed is lost"
        for word in ("lost", "not whole", "stuck"):
            check(word not in found, f"{how}: {found.count(word)} times {_BAD[word]}")
    end()


_BAD = {
    "lost": "a round was lost that was reported as stored",
    "not whole": "the history was not whole",
    "stuck": "the next watch could not go on",
}


def afterwards(
    written: Sequence[Write], moments: Sequence[int], share: float, chance: random.Random
) -> Iterator[tuple[Path, int]]:
    """The disk after a power cut at each moment, and how many rounds had been reported as stored by then.

    Args:
        written: all writes, in order.
        moments: places in it, rising.
        share: how much of what no flush had reached is lost.
        chance: says what of it.
    """
    kept, after = Path("/dev/shm/kept.img"), Path("/dev/shm/after.img")  # noqa: S108  # the guest is ours alone
    kept.write_bytes(bytes(MIB << 20))
    done = 0
    for moment in moments:
        safe = max(index for index in range(moment + 1) if written[index].flags & _FLUSH)
        with kept.open("r+b") as disk:
            for one in written[done:safe]:
                put(disk, one)
        done = safe
        sh(f"cp {kept} {after}")
        with after.open("r+b") as disk:
            for one in written[safe : moment + 1]:
                if one.flags & _FUA or chance.random() >= share:
                    put(disk, one)
        yield after, max(int(one.mark) for one in written[: moment + 1] if one.mark.isdigit())


def put(disk: BinaryIO, one: Write) -> None:
    """Write it where it belongs."""
    if one.data:
        disk.seek(one.sector * _SECTOR)
        disk.write(one.data)


def looked_at(image: Path, promised: int) -> str:
    """What a disk holds after the power came back."""
    place = HERE / "after"
    place.mkdir(exist_ok=True)
    sh(f"mount -o loop {image} {place}")
    try:
        found = passes(place / "state")
        if found < promised:
            say(f"       {found} rounds of {promised}")
            return "lost"
        return "" if goes_on(place / "state", found) else "stuck"
    except (AssertionError, DiskwatchError, sqlite3.Error) as error:
        say(f"       {type(error).__name__}: {error}")
        return "not whole"
    finally:
        sh(f"umount {place}")


main()
