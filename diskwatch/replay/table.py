"""Reads a table of recorded daily readings row by row; what cannot be understood is named and skipped."""

import csv
import gzip
import io
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from math import isfinite
from pathlib import Path
from typing import BinaryIO

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.records import Drive, Identity, Kind, Outcome, Pass, Reading, Value
from diskwatch.replay.columns import FLASH_ONLY, Layout, layout_of, value
from diskwatch.units import DAY, plain

_TRUE = frozenset({"1", "true", "yes", "1.0"})
_FALSE = frozenset({"0", "false", "no", "", "0.0"})
_MOST_KEPT = 100_000
"""Values that are kept for use again: most of a table's numbers stand in it thousands of times."""


@dataclass(frozen=True, slots=True)
class Row:
    """One drive on one day.

    Attributes:
        serial: serial as recorded.
        pass_: the reading as a pass, at the first second of the day in UTC.
        failed: whether the row says that the drive failed.
    """

    serial: str
    pass_: Pass
    failed: bool


class BadRow(ValueError):
    """A row cannot be understood; says why."""


class Table:
    """One file of recorded readings, open from its first row on."""

    def __init__(self, path: Path) -> None:
        """Take a file; ``.gz`` is unpacked on the way.

        Raises:
            UsageError: its header is of neither layout.
            DiskwatchError: it cannot be read.
        """
        self._path = path
        try:
            self._file: BinaryIO = path.open("rb")
            unpacked = gzip.GzipFile(fileobj=self._file) if path.suffix == ".gz" else self._file
            self._lines = io.TextIOWrapper(unpacked, encoding="utf-8", errors="replace", newline="")
            self._rows = csv.reader(self._lines)
            header = next(self._rows, [])
        except (OSError, EOFError, csv.Error) as error:
            raise DiskwatchError(f"{path}: cannot be read: {error}") from error
        layout = layout_of(header)
        if layout is None:
            self.close()
            raise UsageError(
                f"{path}: its first line names neither day and serial nor date and serial_number",
                hint="see 'diskwatch replay --help' for the two layouts",
            )
        self._layout: Layout = layout
        self._values: dict[tuple[int, str], Value | None] = {}
        self._drives: dict[str, Drive] = {}
        self._days: dict[str, int] = {}

    @property
    def read_bytes(self) -> int:
        """Bytes of the file that have been read so far, as it lies on the disk."""
        return self._file.tell()

    def rows(self, wanted: Callable[[str], bool], bad: Callable[[str], None]) -> Iterator[Row]:
        """Every row of the drives that are wanted.

        Args:
            wanted: whether a drive, by its serial, is wanted.
            bad: told in one sentence of each row that is skipped; rows without a serial belong to nobody and
                are told to everybody.

        Raises:
            DiskwatchError: the file ends in the middle or cannot be read on.
        """
        serial_at = self._layout.serial
        try:
            for fields in self._rows:
                if not fields:
                    continue
                try:
                    serial = fields[serial_at].strip()
                except IndexError:
                    serial = ""
                if serial and not wanted(serial):
                    continue
                try:
                    yield self._row(fields, serial)
                except BadRow as error:
                    bad(f"{self._path}:{self._rows.line_num}: {error}; the row was skipped")
        except (OSError, EOFError, csv.Error) as error:
            raise DiskwatchError(f"{self._path}:{self._rows.line_num}: cannot be read on: {error}") from error

    def close(self) -> None:
        """Let go of the file."""
        self._lines.close()
        self._file.close()

    def _row(self, fields: Sequence[str], serial: str) -> Row:
        layout = self._layout
        if len(fields) != layout.width:
            raise BadRow(f"it has {len(fields)} fields where the first line has {layout.width}")
        if not serial:
            raise BadRow("it names no serial")
        at = self._day(fields[layout.day]) * DAY
        reading = Reading(values=self._read(fields))
        return Row(
            serial=serial,
            pass_=Pass(
                at=at, outcome=Outcome.READ, drive=self._drive(fields, serial, reading), reading=reading
            ),
            failed=layout.failed is not None and _flag(fields[layout.failed]),
        )

    def _day(self, text: str) -> int:
        found = self._days.get(text)
        if found is None:
            found = self._days[text] = _day_number(text)
        return found

    def _read(self, fields: Sequence[str]) -> tuple[Value, ...]:
        found = []
        for index, meaning in self._layout.values:
            text = fields[index]
            key = (index, text)
            if key not in self._values:
                if len(self._values) >= _MOST_KEPT:
                    self._values.clear()
                number = _number(text, meaning.signal)
                self._values[key] = None if number is None else value(meaning, number)
            one = self._values[key]
            if one is not None:
                found.append(one)
        return tuple(found)

    def _drive(self, fields: Sequence[str], serial: str, reading: Reading) -> Drive:
        drive = self._drives.get(serial)
        if drive is None:
            layout = self._layout
            model = fields[layout.model].strip() or None if layout.model is not None else None
            flash = any(reading.get(signal) is not None for signal in FLASH_ONLY)
            capacity = None
            if layout.capacity is not None:
                capacity = _number(fields[layout.capacity], "size", negative=True)
            drive = self._drives[serial] = Drive(
                identity=Identity(wwn=None, model=model, serial=serial, path=serial),
                kind=Kind.NVME if flash else Kind.SSD if "SSD" in (model or "").upper() else Kind.HDD,
                capacity_bytes=capacity if capacity is not None and capacity > 0 else None,
            )
        return drive


def _day_number(text: str) -> int:
    """A day: ``2013-05-14``, with a time behind it or not, or a plain number of days."""
    stripped = text.strip()
    if stripped.isdecimal() and stripped.isascii() and len(stripped) < 8:
        return int(stripped)
    try:
        return date.fromisoformat(stripped[:10]).toordinal() - date(1970, 1, 1).toordinal()
    except ValueError:
        raise BadRow(f"{plain(text[:40])!r} is no day") from None


def _number(text: str, what: str, *, negative: bool = False) -> int | None:
    """A whole number, also where it is written ``12.0``; None for an empty field."""
    try:
        number = int(text)
    except ValueError:
        if not text.strip():
            return None
        number = _from_decimal(text, what)
    if number < 0 and not negative:
        raise BadRow(f"{what} is {number}, below 0")
    return number


def _from_decimal(text: str, what: str) -> int:
    try:
        exact = float(text)
    except ValueError:
        exact = float("nan")
    if not isfinite(exact) or exact != int(exact):
        raise BadRow(f"{what} is {plain(text[:40])!r}, no whole number")
    return int(exact)


def _flag(text: str) -> bool:
    folded = text.strip().casefold()
    if folded in _TRUE:
        return True
    if folded in _FALSE:
        return False
    raise BadRow(f"{plain(text[:40])!r} says neither that the drive failed nor that it did not")
