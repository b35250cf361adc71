"""Values that cannot be right, in a file that is otherwise sound: taken out with a word, and what hung on them.

A changed byte may leave every page readable. It costs what stood in the one cell and no more: the row is taken
out or the cell made unknown, what stood there goes into the day book, and a drive whose state or judgement it
was is judged anew from what is left.
"""

import sqlite3
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from diskwatch.history import rows
from diskwatch.history.arriving import Arrived
from diskwatch.history.care import reading
from diskwatch.history.checks import MORE, Check, Readable, first
from diskwatch.history.mishaps import told
from diskwatch.history.moving import Judge, case_of, keep_judged
from diskwatch.history.round import known_drives, write_entries
from diskwatch.language import _
from diskwatch.records import Entry
from diskwatch.units import plain

_MOST_KEPT = 4_096
"""Bytes of a cell that the day book keeps at most."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Garbled:
    """One row that cannot be right.

    Attributes:
        check: which check found it.
        key: the cells that tell it from others.
        drive: the number of the drive that it concerns, or None.
        cells: what stands there.
        why: why that cannot be right.
    """

    check: Check
    key: tuple[rows.Cell, ...]
    drive: int | None
    cells: tuple[rows.Cell, ...]
    why: str


def garbled(connection: sqlite3.Connection, readable: Readable, *, thorough: bool) -> tuple[Garbled, ...]:
    """All rows that cannot be right.

    Args:
        connection: to the history.
        readable: tells a state of the analyser from another text.
        thorough: whether to look at all tables, and not only at those that a watch begins with.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    return tuple(
        one for check in (*first(readable), *(MORE if thorough else ())) for one in _found(connection, check)
    )


def to_mend(path: Path, readable: Readable) -> bool:
    """Whether anything in a history cannot be right; nobody who writes waits for the answer.

    Args:
        path: the history.
        readable: as for `garbled`.

    Raises:
        HistoryError: it cannot be read.
    """
    try:
        with reading(path) as connection:
            return bool(garbled(connection, readable, thorough=True))
    except sqlite3.Error as error:
        raise told(error, path) from error


def mend(
    connection: sqlite3.Connection, judge: Judge, readable: Readable, at: int, *, thorough: bool
) -> tuple[Entry, ...]:
    """Take out what cannot be right, judge anew what hung on it, and say so in the day book.

    Args:
        connection: within a transaction.
        judge: says what is thought of a drive, from its dated states and its passes.
        readable: tells a state of the analyser from another text.
        at: now, UTC seconds since 1970.
        thorough: as for `garbled`; where anything is found, all tables are looked at.

    Returns:
        What the day book says of it; nothing where nothing was wrong.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    found = garbled(connection, readable, thorough=thorough)
    if found and not thorough:
        found = garbled(connection, readable, thorough=True)
    for one in found:
        _take_out(connection, one)
    anew = {one.drive for one in found if one.check.judged} | set(_without_a_state(connection))
    entries = [_entry(one, at) for one in found]
    for known in known_drives(connection):
        if known.number in anew:
            arrived = Arrived(wrong=(), new_from=None, own_from=None, states=())
            judged = judge(case_of(connection, known, arrived))
            if judged is not None:
                keep_judged(connection, known.number, judged)
                text = _("What is thought of it was worked out again from what the history holds of it.")
                entries.append(Entry(at=at, drive=known.number, kind="trouble", text=text))
    write_entries(connection, entries)
    return tuple(entries)


def _without_a_state(connection: sqlite3.Connection) -> Iterator[int]:
    """Drives that were judged once and of which the state is lost, as with a page of a damaged file."""
    for (number,) in connection.execute(
        "SELECT number FROM drive WHERE number NOT IN (SELECT drive FROM analyser_state)"
        " AND (number IN (SELECT drive FROM call) OR number IN (SELECT drive FROM kept_state))"
    ).fetchall():
        yield int(number)


def _found(connection: sqlite3.Connection, check: Check) -> Iterator[Garbled]:
    columns = ", ".join((*check.key, check.drive, *check.cells))
    keys = len(check.key)
    for row in connection.execute(
        f"SELECT {columns} FROM {check.table} WHERE {check.suspects}"  # noqa: S608  # names of our own schema
    ):
        cells = tuple(row[keys + 1 :])
        try:
            check.decode(*cells)
        except (ValueError, TypeError) as error:
            yield Garbled(check=check, key=tuple(row[:keys]), drive=row[keys], cells=cells, why=str(error))


def _take_out(connection: sqlite3.Connection, one: Garbled) -> None:
    check = one.check
    where = " AND ".join(f"{name} = ?" for name in check.key)
    deed = f"DELETE FROM {check.table}" if check.put is None else f"UPDATE {check.table} SET {check.put}"  # noqa: S608  # likewise
    connection.execute(f"{deed} WHERE {where}", one.key)


def _entry(one: Garbled, at: int) -> Entry:
    check = one.check
    text = (
        _("{what} could not be read from the history ({why}); the row was taken out.")
        if check.put is None
        else _("{what} could not be read from the history ({why}); it counts as not known now.")
    ).format(what=_(check.what), why=plain(one.why))
    data = {
        "table": check.table,
        "row": dict(zip(check.key, map(_kept, one.key), strict=True)),
        "held": dict(zip(check.cells, map(_kept, one.cells), strict=True)),
    }
    return Entry(at=at, drive=one.drive, kind="trouble", text=text, data=data)


def _kept(cell: rows.Cell) -> object:
    return cell[:_MOST_KEPT].hex() if isinstance(cell, bytes) else cell
