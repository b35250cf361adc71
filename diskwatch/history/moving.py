"""A drive's past moves in: its rows are taken in, then it is judged anew, within one transaction."""

import json
import sqlite3
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

from diskwatch.history import packing
from diskwatch.history.arriving import Arrived, Described, take_in
from diskwatch.history.exchange import Line
from diskwatch.history.judgement import write_judgement
from diskwatch.history.moments import Dated
from diskwatch.history.probes import probes
from diskwatch.history.readings import passes_with_readings
from diskwatch.history.round import admit
from diskwatch.records import DriveRound, KnownDrive, Pass, ProbeDay, Settled


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One drive of a file.

    Attributes:
        known: the drive that it is here; None for a new one.
        described: how the file describes it.
        lines: its rows.
    """

    known: KnownDrive | None
    described: Described
    lines: Sequence[Line]


@dataclass(frozen=True, slots=True, kw_only=True)
class Said:
    """A word of the owner's, and where it stands among the passes.

    Attributes:
        word: what was said.
        after: when the last pass before it was, UTC seconds since 1970; None where that was not kept.
    """

    word: Settled
    after: int | None

    def before(self, at: int) -> bool:
        """Whether it was said before a pass of this time; in one second, either may have been first."""
        return self.word.at < at or (self.word.at == at and self.after != at)


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """What there is to judge a drive by, after its past has moved in.

    Attributes:
        known: the drive.
        copies: dated states that stood here before, oldest first.
        arrived: what came with the file.
        passes: the drive's passes behind a state (None: all) with their turns and readings, in their order.
        probes: the drive's probes that ended after a time (None: all), oldest first.
        words: what the owner said was seen to, here or where the file comes from, oldest first.
    """

    known: KnownDrive
    copies: tuple[Dated, ...]
    arrived: Arrived
    passes: Callable[[Dated | None], Iterator[tuple[int, Pass]]]
    probes: Callable[[int | None], tuple[ProbeDay, ...]] = lambda after: ()  # noqa: ARG005  # never probed
    words: tuple[Said, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """What is thought of the drive now.

    Attributes:
        part: findings, evidence, call and state; its pass is the last one.
        since: all dated states behind this one are no longer right; None for none of them.
        copies: those that take their place.
        anew: whether it was judged from its first pass on, so that no dated state is right any more.
    """

    part: DriveRound
    since: Dated | None
    copies: tuple[Dated, ...]
    anew: bool = False


Judge = Callable[[Case], Judged | None]


def arrive(connection: sqlite3.Connection, part: Part, judge: Judge) -> Arrived:
    """Take in one drive's past and judge it.

    Args:
        connection: within a transaction.
        part: the drive and its rows.
        judge: says what is thought of it now; None leaves all as it is.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    there = part.described
    known = part.known or admit(connection, there.drive, there.place, there.first_seen)
    copies = dated_states(connection, known.number)
    arrived = take_in(connection, known.number, part.lines)
    judged = judge(replace(case_of(connection, known, arrived), copies=copies))
    if judged is not None:
        keep_judged(connection, known.number, judged)
    return arrived


def case_of(connection: sqlite3.Connection, known: KnownDrive, arrived: Arrived) -> Case:
    """What there is to judge a drive by.

    Args:
        connection: within a transaction, which must not have ended when the case is judged.
        known: the drive.
        arrived: what came from elsewhere.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    return Case(
        known=known,
        copies=dated_states(connection, known.number),
        arrived=arrived,
        probes=lambda after: probes(connection, known.number, after=after),
        passes=lambda after: passes_with_readings(connection, known.number, after),
        words=tuple(_words(connection, known.number)),
    )


def keep_judged(connection: sqlite3.Connection, number: int, judged: Judged) -> None:
    """Keep what is thought of a drive now, with its dated states.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    if judged.anew:
        connection.execute("DELETE FROM kept_state WHERE drive = ?", (number,))
    elif judged.since is not None:
        connection.execute(
            "DELETE FROM kept_state WHERE drive = ? AND (turn, at) > (?, ?)",
            (number, judged.since.turn, judged.since.at),
        )
    connection.executemany(
        "INSERT OR REPLACE INTO kept_state (drive, at, packed, turn) VALUES (?, ?, ?, ?)",
        [(number, one.at, packing.packed(one.state), one.turn) for one in judged.copies],
    )
    write_judgement(connection, judged.part, judged.part.pass_.at)


def dated_states(connection: sqlite3.Connection, drive: int) -> tuple[Dated, ...]:
    """States of the analyser from which a drive's present one can be worked out again, oldest first.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    found = connection.execute(
        "SELECT turn, at, packed FROM kept_state WHERE drive = ?1 UNION ALL"
        " SELECT turn, at, packed FROM analyser_state WHERE drive = ?1 ORDER BY turn, at",
        (drive,),
    ).fetchall()
    return tuple(Dated(turn=turn, at=at, state=packing.unpacked(packed)) for turn, at, packed in found)


def _words(connection: sqlite3.Connection, drive: int) -> Iterator[Said]:
    """The owner's words from the day book; that another drive took its place changes no judgement."""
    found = connection.execute(
        "SELECT at, data FROM day_book WHERE drive = ? AND kind = 'settled' ORDER BY at, number", (drive,)
    ).fetchall()
    for at, kept in found:
        data = json.loads(kept)
        because, signals = data.get("because"), data.get("signals", [])
        told = isinstance(because, str) and isinstance(signals, list)
        if told and data.get("replaced_by") is None and all(isinstance(one, str) for one in signals):
            after = data.get("after")
            yield Said(
                word=Settled(at=at, because=because, signals=tuple(signals)),
                after=after if isinstance(after, int) else None,
            )
