"""Runs recorded rows through the analyser; memory grows with the drives, not with the rows."""

import zlib
from collections.abc import Callable, Iterable, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, field
from multiprocessing import get_context
from pathlib import Path

from diskwatch import analyser
from diskwatch.records import Call, Drift, Entry, IoRollup, ReplayedDrive
from diskwatch.replay.daily import Row
from diskwatch.replay.fives import Fives
from diskwatch.replay.stretches import Stretch
from diskwatch.replay.table import Table
from diskwatch.trends.latency import Latency
from diskwatch.units import DAY, rfc3339

Progress = Callable[[int, int], None]
"""Told now and then how many bytes of how many have been read."""

_EVERY = 4_000
_MOST_TOLD = 50
"""Skipped rows of a file that are named; the rest is counted."""


@dataclass(slots=True)
class _Life:
    """A drive whose rows are coming in."""

    model: str | None
    first: int
    last: int
    state: analyser.DriveState = field(default_factory=analyser.start)
    read: int | None = None
    traffic: Fives = field(default_factory=Fives)
    latency: Latency = field(default_factory=analyser.no_latency)
    failed: bool = False
    rows: int = 0
    calls: list[Call] = field(default_factory=list)
    drifts: list[Drift] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Part:
    """What one process made of its share of the drives.

    Attributes:
        drives: in the order in which they first appear.
        skipped: rows that were not used.
        told: one sentence a skipped row, at most so many a file.
    """

    drives: tuple[ReplayedDrive, ...]
    skipped: int
    told: tuple[str, ...]


def replay(paths: Sequence[Path], *, jobs: int = 1, progress: Progress | None = None) -> Part:
    """Replay files of recorded readings.

    Args:
        paths: the files; a drive may go on from one to the next.
        jobs: processes to share the drives out to; each reads the files and judges its own drives.
        progress: told of the way of one of them, which stands for all.

    Raises:
        UsageError: a file has no layout that is known.
        DiskwatchError: a file cannot be read.
    """
    if jobs == 1:
        return _share(paths, 0, 1, progress)
    with ProcessPoolExecutor(jobs - 1, mp_context=get_context("spawn")) as pool:
        others = [pool.submit(_share, paths, share, jobs, None) for share in range(1, jobs)]
        mine = _share(paths, 0, jobs, progress)
        parts = [mine, *(other.result() for other in others)]
    return Part(
        drives=tuple(
            sorted((drive for part in parts for drive in part.drives), key=lambda drive: drive.serial)
        ),
        skipped=sum(part.skipped for part in parts),
        told=tuple(sentence for part in parts for sentence in part.told),
    )


def _share(paths: Sequence[Path], share: int, of: int, progress: Progress | None) -> Part:
    """Judge the drives whose serial falls to this share."""
    lives: dict[str, _Life] = {}
    told: list[str] = []
    skipped = 0
    total = sum(path.stat().st_size for path in paths if path.is_file())
    before = 0

    def mine(serial: str) -> bool:
        return of == 1 or zlib.crc32(serial.encode()) % of == share

    def shown(read: int) -> None:
        if progress is not None:
            progress(before + read, total)

    for path in paths:
        bad = _read(path, lives, mine, shown)
        skipped += len(bad)
        told += bad[:_MOST_TOLD]
        if len(bad) > _MOST_TOLD:
            told.append(f"{path}: {len(bad) - _MOST_TOLD} more rows were skipped")
        before += path.stat().st_size
    shown(0)
    for life in lives.values():
        for day, rollups in life.traffic.rest():
            _take_day(life, day, rollups)
    drives = _ended(lives.items())
    return Part(drives=tuple(sorted(drives, key=lambda drive: drive.serial)), skipped=skipped, told=tuple(told))


def _read(
    path: Path, lives: dict[str, _Life], mine: Callable[[str], bool], shown: Callable[[int], None]
) -> list[str]:
    """Take one file in; gives a sentence for every row that was skipped, an empty one beyond the first many."""
    table = Table(path)
    skipped: list[str] = []

    def bad(sentence: str) -> None:
        # A file of a million bad rows must not fill the memory with words that nobody is told.
        skipped.append(sentence if len(skipped) < _MOST_TOLD else "")

    try:
        for number, row in enumerate(table.rows(mine, bad)):
            if isinstance(row, Stretch):
                _work(lives, row, bad, path)
            else:
                _live(lives, row, bad, path)
            if number % _EVERY == 0:
                shown(table.read_bytes)
    finally:
        table.close()
    return skipped


def _live(lives: dict[str, _Life], row: Row, bad: Callable[[str], None], path: Path) -> None:
    """Take one row of a drive's life in."""
    at = row.pass_.at
    life = lives.get(row.serial)
    if life is None:
        life = lives[row.serial] = _Life(model=None, first=at, last=at)
    if life.read is None:
        drive = row.pass_.drive
        life.model = drive.identity.model if drive else None
    elif at <= life.read:
        when = "the same day" if at == life.read else "a later day"
        bad(f"{path}: {row.serial} on {rfc3339(at)[:10]} stands behind {when}; the row was skipped")
        life.failed = life.failed or row.failed
        return
    step = analyser.advance(life.state, row.pass_)
    _follow(life, step.state, step.happened)
    life.read = at
    _used(life, at, at)
    life.failed = life.failed or row.failed


def _work(lives: dict[str, _Life], stretch: Stretch, bad: Callable[[str], None], path: Path) -> None:
    """Take one row of a drive's traffic in; a day of it is judged once the next one begins."""
    begins = int(stretch.at - stretch.seconds)
    life = lives.get(stretch.serial)
    if life is None:
        life = lives[stretch.serial] = _Life(model=None, first=begins, last=stretch.at)
    # A second to either side: times are whole seconds, intervals are not.
    elif life.traffic.until is not None and begins < life.traffic.until - 1:
        when = f"{stretch.serial} at {rfc3339(stretch.at)}"
        bad(f"{path}: {when} overlaps traffic before it or stands behind it; the row was skipped")
        return
    for day, rollups in life.traffic.add(stretch):
        _take_day(life, day, rollups)
    _used(life, begins, stretch.at)


def _take_day(life: _Life, day: int, rollups: Sequence[IoRollup]) -> None:
    step = analyser.take_in_traffic(life.state, life.latency, rollups, day=day, at=(day + 1) * DAY, key="")
    life.latency = step.latency
    _follow(life, step.state, step.happened)


def _follow(life: _Life, state: analyser.DriveState, happened: Iterable[Entry]) -> None:
    """Note what a step changed."""
    before, call = life.state.call, state.call
    if call is not None and (before is None or call.word is not before.word):
        life.calls.append(call)
    for entry in happened:
        if entry.kind == "drift":
            evidence = float(str(entry.data["evidence"]))
            life.drifts.append(Drift(at=entry.at, signal=str(entry.data["signal"]), evidence=evidence))
    life.state = state


def _used(life: _Life, first: int, last: int) -> None:
    life.rows += 1
    life.first, life.last = min(life.first, first), max(life.last, last)


def _ended(lives: Iterable[tuple[str, _Life]]) -> list[ReplayedDrive]:
    return [
        ReplayedDrive(
            serial=serial,
            model=life.model,
            first=life.first,
            last=life.last,
            failed=life.failed,
            rows=life.rows,
            calls=tuple(life.calls),
            drifts=tuple(life.drifts),
        )
        for serial, life in lives
    ]
