"""A row of recorded daily readings as a pass; what cannot be understood raises `BadRow`."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

from diskwatch.records import Drive, Identity, Kind, Outcome, Pass, Reading, Value
from diskwatch.replay.cells import BadRow, whole
from diskwatch.replay.columns import FLASH_ONLY, Layout, Meaning, value
from diskwatch.units import DAY, plain

_TRUE = frozenset({"1", "true", "yes", "1.0"})
_FALSE = frozenset({"0", "false", "no", "", "0.0"})
_MOST_KEPT = 20_000
"""Values of a column that are kept for use again: most of a table's numbers stand in it thousands of times."""


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


class Daily:
    """Reads rows of one table of daily readings."""

    def __init__(self, layout: Layout) -> None:
        """Begin.

        Args:
            layout: where everything stands in a row.
        """
        self._layout = layout
        self._columns: list[tuple[int, Meaning, dict[str, Value | None]]] = [
            (index, meaning, {}) for index, meaning in layout.values
        ]
        self._drives: dict[str, Drive] = {}
        self._days: dict[str, int] = {}

    def row(self, fields: Sequence[str], serial: str) -> Row:
        """One row.

        Args:
            fields: as many as the first line has.
            serial: the drive's, as recorded.

        Raises:
            BadRow: it cannot be understood; says why.
        """
        layout = self._layout
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
        for index, meaning, known in self._columns:
            text = fields[index]
            if text not in known:
                if len(known) >= _MOST_KEPT:
                    known.clear()
                number = whole(text, meaning.signal)
                known[text] = None if number is None else value(meaning, number)
            one = known[text]
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
                capacity = whole(fields[layout.capacity], "size", negative=True)
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


def _flag(text: str) -> bool:
    if text in _FALSE:
        return False
    folded = text.strip().casefold()
    if folded in _TRUE:
        return True
    if folded in _FALSE:
        return False
    raise BadRow(f"{plain(text[:40])!r} says neither that the drive failed nor that it did not")
