"""Carrying rows from a damaged file into a sound one, table by table, past what cannot be read.

A table is read in the order of its key. Where that fails, the next key that can be read is found by steps that
double, then halve: a destroyed page costs the rows on it and a few dozen questions.
"""

import sqlite3
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

_LARGEST = 2**62

_BY_TEXT = frozenset({"owner_fact", "thinned", "way", "left_off", "heard", "forecast"})
"""Small tables whose key holds words: read forward, then backward from the end."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Carried:
    """What came over.

    Attributes:
        rows: how many, by table.
        gaps: places that could not be read, by table; only tables with some.
    """

    rows: Mapping[str, int]
    gaps: Mapping[str, int]


@dataclass(frozen=True, slots=True)
class _Table:
    name: str
    columns: tuple[str, ...]
    key: tuple[str, ...]

    def select(self, rest: str) -> str:
        columns = ", ".join((*self.columns, *self.steps))
        return f"SELECT {columns} FROM {self.name} {rest}"  # noqa: S608  # names of our own schema

    @property
    def order(self) -> str:
        return ", ".join(self.key)

    @property
    def steps(self) -> tuple[str, ...]:
        """The parts of the key, whole numbers, by which what cannot be read is stepped over."""
        return self.key[:2]


def tables_of(old: sqlite3.Connection) -> frozenset[str]:
    """Names of the tables of a file.

    Raises:
        sqlite3.Error: not even these can be read.
    """
    return frozenset(
        name for (name,) in old.execute("SELECT name FROM sqlite_master WHERE type = 'table'").fetchall()
    )


def carry(old: sqlite3.Connection, new: sqlite3.Connection) -> Carried:
    """Carry over all that can be read; what the new file has already stays.

    Args:
        old: the damaged file, read only, of which `tables_of` can be asked.
        new: a history of this version, without foreign keys enforced.

    Raises:
        sqlite3.Error: the new file cannot be written.
    """
    there = tables_of(old)
    rows: dict[str, int] = {}
    gaps: dict[str, int] = {}
    for table in _tables(new, old):
        if table.name in there:
            reading = _Reading(old, table)
            with new:
                rows[table.name] = _insert(new, reading)
            if reading.gaps:
                gaps[table.name] = reading.gaps
    return Carried(rows=rows, gaps=gaps)


def let_go_of_orphans(new: sqlite3.Connection) -> int:
    """Take out rows whose drive or series is lost, and say how many; an explanation may be missing.

    A drive that is met next may be given a lost one's number: nothing may be left for it to take up.
    """
    taken, before = 0, -1
    references = tuple(_references(new))
    # A series may go with its drive, and its values with the series.
    while taken != before:
        before = taken
        for child, column, parent, key in references:
            lost = f"{column} IS NOT NULL AND {column} NOT IN (SELECT {key} FROM {parent})"  # noqa: S608  # names of our own schema
            if parent == "sentence":
                new.execute(f"UPDATE {child} SET {column} = NULL WHERE {lost}")  # noqa: S608  # likewise
            else:
                taken += new.execute(f"DELETE FROM {child} WHERE {lost}").rowcount  # noqa: S608  # likewise
    return taken + new.execute(_LOST_MARKS).rowcount


_LOST_MARKS = """
    DELETE FROM thinned WHERE (what IN ('pass', 'beside') AND number NOT IN (SELECT number FROM drive))
    OR (what = 'value' AND number NOT IN (SELECT number FROM series))
"""
"""How far a drive's passes and a series' values were thinned: what comes next is thinned from its first row."""


def _references(new: sqlite3.Connection) -> Iterator[tuple[str, str, str, str]]:
    """Which column of which table names a row of which other one, by which of its columns."""
    for table in sorted(tables_of(new)):
        for _, _, parent, column, key, *_ in new.execute(f"PRAGMA foreign_key_list({table})").fetchall():
            yield table, column, parent, key or "number"


def _tables(new: sqlite3.Connection, old: sqlite3.Connection) -> Iterator[_Table]:
    names = new.execute(
        "SELECT name, wr FROM pragma_table_list WHERE schema = 'main' AND type = 'table' AND strict"
    ).fetchall()
    for name, without_rowid in names:
        mine = new.execute("SELECT name, pk, hidden FROM pragma_table_xinfo(?)", (name,)).fetchall()
        theirs = {row[0] for row in old.execute("SELECT name FROM pragma_table_xinfo(?)", (name,))}
        columns = tuple(column for column, _, hidden in mine if not hidden and column in theirs)
        # An older file may have had a shorter key.
        keys = tuple(
            column for column, place, _ in sorted(mine, key=lambda row: row[1]) if place and column in theirs
        )
        yield _Table(name, columns, keys if without_rowid else ("rowid",))


class _Reading:
    """Reads a table past what cannot be read, and counts the places."""

    def __init__(self, old: sqlite3.Connection, table: _Table) -> None:
        self.table = table
        self.gaps = 0
        self._old = old
        self._width = len(table.steps)

    def rows(self) -> Iterator[tuple[object, ...]]:
        """All rows that can be read, some of them twice."""
        if self.table.name in _BY_TEXT:
            yield from self._from_both_ends()
            return
        marks = ", ".join("?" * self._width)
        onward = self.table.select(
            f"WHERE ({', '.join(self.table.steps)}) >= ({marks}) ORDER BY {self.table.order}"
        )
        position: tuple[int, ...] = (-_LARGEST,) * self._width
        while True:
            try:
                for row in self._old.execute(onward, position):
                    yield row[: -self._width]
                    position = row[-self._width :]
                return
            except sqlite3.DatabaseError:
                self.gaps += 1
            # Found by a question of its own and handed on at once: Python's cursor looks one row ahead, and so
            # loses the row before each gap.
            found = self._behind(position)
            if found is None:
                return
            yield found[: -self._width]
            position = found[-self._width :]

    def _behind(self, position: tuple[int, ...]) -> tuple[Any, ...] | None:
        """The first row that can be read behind a place; None where there is none."""
        steps = self.table.steps
        if len(position) == 2:
            inner = self._gallop(f"WHERE {steps[0]} = ? AND {steps[1]} >= ?", position)
            if inner is not None:
                return inner
        return self._gallop(f"WHERE {steps[0]} >= ?", position[:1])

    def _gallop(self, where: str, behind: tuple[int, ...]) -> tuple[Any, ...] | None:
        group, bad = behind[:-1], behind[-1]
        sql = self.table.select(f"{where} ORDER BY {self.table.order} LIMIT 1")

        def asked(at: int) -> tuple[bool, tuple[Any, ...] | None]:
            try:
                return True, self._old.execute(sql, (*group, at)).fetchone()
            except sqlite3.DatabaseError:
                return False, None

        step, good = 1, bad + 1
        while not (answer := asked(good))[0]:
            step *= 2
            bad, good = good, good + step
            if good > _LARGEST:
                return None
        found = answer[1]
        while good - bad > 1:
            middle = (good + bad) // 2
            readable, nearer = asked(middle)
            if readable:
                good, found = middle, nearer
            else:
                bad = middle
        return found

    def _from_both_ends(self) -> Iterator[tuple[object, ...]]:
        for way in ("", " DESC"):
            order = ", ".join(f"{part}{way}" for part in self.table.key)
            try:
                for row in self._old.execute(self.table.select(f"ORDER BY {order}")):
                    yield row[: -self._width]
                return
            except sqlite3.DatabaseError:
                self.gaps += 1


def _insert(new: sqlite3.Connection, reading: _Reading) -> int:
    table = reading.table
    names, marks = ", ".join(table.columns), ", ".join("?" * len(table.columns))
    sql = f"INSERT OR IGNORE INTO {table.name} ({names}) VALUES ({marks})"  # noqa: S608  # names of our own schema
    count = 0
    for row in reading.rows():
        try:
            count += new.execute(sql, row).rowcount
        except sqlite3.IntegrityError:
            reading.gaps += 1  # of a kind that its column cannot hold: damage that left the page readable
    return count
