"""Runs recorded rows through the analyser; memory grows with the drives, not with the rows."""

import zlib
from collections.abc import Callable, Iterable, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, field
from multiprocessing import get_context
from pathlib import Path

from diskwatch import analyser
from diskwatch.records import Call, Drift, ReplayedDrive
from diskwatch.replay.table import Row, Table
from diskwatch.units import rfc3339

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
    for path in paths:
        table = Table(path)
        named = 0

        def bad(sentence: str) -> None:
            nonlocal skipped, named
            skipped += 1
            named += 1
            if named <= _MOST_TOLD:
                told.append(sentence)

        def mine(serial: str) -> bool:
            return of == 1 or zlib.crc32(serial.encode()) % of == share

        try:
            for number, row in enumerate(table.rows(mine, bad)):
                _live(lives, row, bad, path)
                if progress is not None and number % _EVERY == 0:
                    progress(before + table.read_bytes, total)
        finally:
            table.close()
        if named > _MOST_TOLD:
            told.append(f"{path}: {named - _MOST_TOLD} more rows were skipped")
        before += path.stat().st_size
    if progress is not None:
        progress(total, total)
    drives = _ended(lives.items())
    return Part(drives=tuple(sorted(drives, key=lambda drive: drive.serial)), skipped=skipped, told=tuple(told))


def _live(lives: dict[str, _Life], row: Row, bad: Callable[[str], None], path: Path) -> None:
    """Take one row of a drive's life in."""
    at = row.pass_.at
    life = lives.get(row.serial)
    if life is None:
        drive = row.pass_.drive
        life = lives[row.serial] = _Life(model=drive.identity.model if drive else None, first=at, last=at)
    elif at <= life.last:
        when = "the same day" if at == life.last else "a later day"
        bad(f"{path}: {row.serial} on {rfc3339(at)[:10]} stands behind {when}; the row was skipped")
        life.failed = life.failed or row.failed
        return
    step = analyser.advance(life.state, row.pass_)
    if step.call is not None and (life.state.call is None or step.call.word is not life.state.call.word):
        life.calls.append(step.call)
    for entry in step.happened:
        if entry.kind == "drift":
            evidence = entry.data["evidence"]
            life.drifts.append(Drift(at=at, signal=str(entry.data["signal"]), evidence=float(str(evidence))))
    life.state = step.state
    life.last = at
    life.rows += 1
    life.failed = life.failed or row.failed


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
