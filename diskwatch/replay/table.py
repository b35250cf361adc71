"""Reads a table of recorded readings or traffic row by row; what cannot be understood is named and skipped."""

import csv
import gzip
import io
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import BinaryIO

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.replay.cells import BadRow
from diskwatch.replay.columns import layout_of
from diskwatch.replay.daily import Daily, Row
from diskwatch.replay.stretches import Stretch, Stretches, traffic_layout_of


class Table:
    """One file of recorded rows, open from its first row on."""

    def __init__(self, path: Path) -> None:
        """Take a file; ``.gz`` is unpacked on the way.

        Raises:
            UsageError: its header is of none of the layouts.
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
        self._width = len(header)
        traffic, daily = traffic_layout_of(header), layout_of(header)
        self._kind: Daily | Stretches
        if traffic is not None:
            self._serial_at, self._kind = traffic.serial, Stretches(traffic)
        elif daily is not None:
            self._serial_at, self._kind = daily.serial, Daily(daily)
        else:
            self.close()
            raise UsageError(
                f"{path}: its first line names neither day and serial, nor date and serial_number, nor time, "
                f"serial, interval_s and counts of traffic",
                hint="see 'diskwatch replay --help' for the layouts",
            )

    @property
    def read_bytes(self) -> int:
        """Bytes of the file that have been read so far, as it lies on the disk."""
        return self._file.tell()

    def rows(self, wanted: Callable[[str], bool], bad: Callable[[str], None]) -> Iterator[Row | Stretch]:
        """Every row of the drives that are wanted.

        Args:
            wanted: whether a drive, by its serial, is wanted.
            bad: told in one sentence of each row that is skipped; rows without a serial belong to nobody and
                are told to everybody.

        Raises:
            DiskwatchError: the file ends in the middle or cannot be read on.
        """
        serial_at = self._serial_at
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

    def _row(self, fields: list[str], serial: str) -> Row | Stretch:
        if len(fields) != self._width:
            raise BadRow(f"it has {len(fields)} fields where the first line has {self._width}")
        if not serial:
            raise BadRow("it names no serial")
        return self._kind.row(fields, serial)
