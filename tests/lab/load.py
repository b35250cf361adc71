"""A watch under load, for jobs that take its disk away: rounds, traffic and folding of the log by turns."""

import os
import signal
import sqlite3
from contextlib import closing, suppress
from pathlib import Path

from diskwatch.errors import HistoryError
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import (
    Drive,
    DriveRound,
    Entry,
    Identity,
    IoCounts,
    IoSpan,
    Kind,
    KnownDrive,
    Outcome,
    Pass,
    Place,
    Reading,
    Round,
    SignalKind,
    Value,
)

BEGIN = 1_796_126_400  # 2026-12-01T12:00:00Z


def a_round(known: KnownDrive, number: int) -> Round:
    """A round of which every part tells its number."""
    at = BEGIN + number * 1800
    names = [f"count-{one}" for one in range(20)]
    values = [
        Value(signal=name, value=number, unit="events", kind=SignalKind.COUNT, source="invented")
        for name in names
    ]
    part = DriveRound(
        known=known,
        pass_=Pass(at=at, outcome=Outcome.READ, reading=Reading(values=tuple(values))),
        state=f"state {number}",
        evidence={names[0]: float(number)},
    )
    entry = Entry(at=at, drive=known.number, kind="rise", text=f"entry {number}", data={"n": number})
    return Round(at=at, drives=(part,), entries=(entry,))


def known_of(history: History) -> KnownDrive:
    """The one drive."""
    who = Identity(wwn=None, model="Invented 1", serial="INVENTED-1", path="/dev/sdz")
    place = Place(device="/dev/sdz", bay=None)
    return (history.known() or (history.admit(Drive(identity=who, kind=Kind.HDD), place, BEGIN),))[0]


def passes(folder: Path) -> int:
    """How many rounds are there, each of them wholly.

    Raises:
        AssertionError: they are not what was written.
        DiskwatchError: the history cannot be read, and says why.
    """
    with Past.open(folder) as past:
        found = sum(day.passes for day in past.pass_days(1))
        assert [value for _, value in past.series(1, "count-0")] == list(range(found)), "values"
        assert past.state(1) == f"state {found - 1}", "state"
        assert past.day_book(limit=1)[0].data["n"] == found - 1, "day book"
        assert past.evidence(1, "count-0")[-1][1] == found - 1, "evidence"
    with closing(sqlite3.connect(folder / HISTORY)) as connection:
        assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)], "integrity"
    return found


def goes_on(folder: Path, number: int) -> bool:
    """Whether the next watch can write the round of this number, and all is whole then."""
    with History.open(folder) as history:
        history.record(a_round(known_of(history), number))
    return passes(folder) == number + 1


def write_for_ever(folder: Path, pipe: int, first: int) -> None:
    """Rounds, traffic and checkpoints by turns; each round's number is told once it is stored."""
    history = History.open(folder)
    known = known_of(history)
    number = first
    while True:
        with suppress(HistoryError):
            history.record(a_round(known, number))
            number += 1
            os.write(pipe, number.to_bytes(4, "big"))
        nothing = dict.fromkeys(
            ("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms", "busy_ms"), 1
        )
        with suppress(HistoryError):
            history.add_traffic(
                [IoSpan(drive=1, at=BEGIN + number * 60, seconds=10, counts=IoCounts(**nothing))]
            )
            if number % 7 == 0:
                history._db.conn.execute("PRAGMA wal_checkpoint(PASSIVE)")


class Load:
    """A writer in a process of its own."""

    def __init__(self, folder: Path, first: int) -> None:
        self._reader, pipe = os.pipe()
        os.set_blocking(self._reader, False)
        self.stored = first
        self._child = os.fork()
        if self._child == 0:
            try:
                write_for_ever(folder, pipe, first)
            finally:
                os._exit(1)
        os.close(pipe)

    def told(self) -> int:
        """How many rounds it has reported as stored."""
        with suppress(BlockingIOError):
            while more := os.read(self._reader, 4):
                self.stored = int.from_bytes(more, "big")
        return self.stored

    def kill(self) -> int:
        """End it; how many rounds it had reported."""
        os.kill(self._child, signal.SIGKILL)
        os.waitpid(self._child, 0)
        told = self.told()
        os.close(self._reader)
        return told
