"""All that the history knows of its drives now, read in one go from the small tables that hold it."""

import sqlite3
from collections import defaultdict
from collections.abc import Callable, Mapping
from typing import Any, TypeVar

from diskwatch.history import rows
from diskwatch.history.forecasts import forecast, latest_forecasts
from diskwatch.language import _
from diskwatch.records import Call, CallWord, DriveLine, Finding, Kind, SignalNow
from diskwatch.records.owner import LABEL, owner_facts

_Record = TypeVar("_Record")

_STANDING = (
    "SELECT drive, at, word, cause, cause_probability, cause_second, reason, rule, evidence"
    " FROM call WHERE number IN (SELECT max(number) FROM call GROUP BY drive)"
)


def drive_lines(connection: sqlite3.Connection) -> tuple[DriveLine, ...]:
    """Every drive, worst call first, then by label or device; without traffic.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    return all_that_can_be_read(connection)[0]


def all_that_can_be_read(connection: sqlite3.Connection) -> tuple[tuple[DriveLine, ...], tuple[str, ...]]:
    """Every drive as by `drive_lines`, and what of them cannot be right and is left out, a sentence each.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    odd = _Odd()
    said = _said(connection)
    calls = _calls(connection, odd)
    findings = _findings(connection, odd)
    signals = _signals(connection, odd)
    forecasts = latest_forecasts(
        connection, lambda drive, row: odd.decoded(drive, _("a forecast"), forecast, row)
    )
    found = connection.execute(
        "SELECT drive.number, wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
        " device, bay, lives_here, first_seen, passed_at, outcome, sentence.text"
        " FROM drive LEFT JOIN sentence ON sentence.number = drive.explanation"
    ).fetchall()
    lines = []
    for row in found:
        known = rows.known_drive(_mended(row[:13], odd))
        lines.append(
            DriveLine(
                number=known.number,
                drive=known.drive,
                place=known.place,
                label=said[known.number].get(LABEL, ("", 0))[0] or None,
                first_seen=known.first_seen,
                last_pass=odd.decoded(known.number, _("how its last pass went"), rows.last_pass, row[13:]),
                call=calls.get(known.number),
                findings=tuple(sorted(findings[known.number], key=_leading)),
                signals=tuple(signals[known.number]),
                forecasts=forecasts.get(known.number, ()),
                owner=owner_facts(said[known.number]),
            )
        )
    names = {line.number: line.drive.identity.telling_serial or line.place.device for line in lines}
    return tuple(sorted(lines, key=_worst)), odd.sentences(names)


class _Odd:
    """Gathers what cannot be right, so that one cell costs no reader all the others."""

    def __init__(self) -> None:
        self._found: list[tuple[int, str, str]] = []

    def decoded(self, drive: int, what: str, decode: Callable[[Any], _Record], kept: Any) -> _Record | None:
        """What a decoder makes of a cell or row; None where it cannot be right, and that is remembered."""
        try:
            return decode(kept)
        except (ValueError, TypeError) as error:
            self._found.append((drive, what, str(error)))
            return None

    def sentences(self, names: Mapping[int, str]) -> tuple[str, ...]:
        """What was remembered, in the order in which it was met."""
        told = _(
            "Of {drive} {what} cannot be read from the history ({why});"
            " the watch mends that when it starts, and within a week."
        )
        return tuple(
            told.format(drive=names.get(drive, "a drive"), what=what, why=why)
            for drive, what, why in self._found
        )


def _mended(row: rows.Row, odd: _Odd) -> rows.Row:
    """A drive's row, with what is most likely or nothing in place of what cannot be right."""
    number, *_names, kind, _firmware, size, rotation, device, _bay, lives_here, _first_seen = row
    cells = list(row)
    if odd.decoded(number, _("the sort of device"), Kind, kind) is None:
        turns = isinstance(rotation, int) and rotation > 0
        cells[5] = (Kind.HDD if turns else Kind.NVME if "nvme" in device else Kind.SSD).value
    for place, what, kept in ((7, _("the size"), size), (8, _("how fast it turns"), rotation)):
        cells[place] = kept if odd.decoded(number, what, lambda one: (rows.number(one),), kept) else None
    if odd.decoded(number, _("what lives on it"), rows.mounts, lives_here) is None:
        cells[11] = "[]"
    return tuple(cells)


def standing_calls(connection: sqlite3.Connection) -> dict[int, Call]:
    """The call that stands for each drive, by the drive's number.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    return {row[0]: rows.call(row[1:]) for row in connection.execute(_STANDING).fetchall()}


def _said(connection: sqlite3.Connection) -> defaultdict[int, dict[str, tuple[str, int]]]:
    """What the owner said of each drive, with the time of saying, by the fact's name."""
    found: defaultdict[int, dict[str, tuple[str, int]]] = defaultdict(dict)
    for drive, fact, value, at in connection.execute("SELECT drive, fact, value, at FROM owner_fact"):
        found[drive][fact] = (value, at)
    return found


def _calls(connection: sqlite3.Connection, odd: _Odd) -> dict[int, Call]:
    """The call that stands for each drive; for one that cannot be read no older one stands in."""
    found = (
        (row[0], odd.decoded(row[0], _("its call"), rows.call, row[1:]))
        for row in connection.execute(_STANDING)
    )
    return {drive: call for drive, call in found if call is not None}


def _findings(connection: sqlite3.Connection, odd: _Odd) -> defaultdict[int, list[Finding]]:
    found: defaultdict[int, list[Finding]] = defaultdict(list)
    for row in connection.execute(
        "SELECT drive, name, kind, signals, since, calls, cause, evidence, sentence, data"
        " FROM finding WHERE closed IS NULL ORDER BY number"
    ):
        finding = odd.decoded(row[0], _("a finding"), rows.finding, row[1:])
        if finding is not None:
            found[row[0]].append(finding)
    return found


def _signals(connection: sqlite3.Connection, odd: _Odd) -> defaultdict[int, list[SignalNow]]:
    found: defaultdict[int, list[SignalNow]] = defaultdict(list)
    for drive, name, value, unit, since, evidence in connection.execute(
        "SELECT drive, signal, value, unit, since, evidence"
        " FROM series JOIN latest ON latest.series = series.number"
        " WHERE current AND since IS NOT NULL ORDER BY drive, signal"
    ):
        known = odd.decoded(drive, _("the value of {signal}").format(signal=name), rows.value, value)
        found[drive].append(SignalNow(name=name, value=known, unit=unit, since=since, evidence=evidence))
    return found


def _leading(finding: Finding) -> tuple[int, bool, float, str]:
    """Worst call first; of the same call what needs no evidence, then the strongest evidence."""
    rank = -1 if finding.calls is None else finding.calls.rank
    return -rank, finding.evidence is not None, -(finding.evidence or 0.0), finding.name


def _worst(line: DriveLine) -> tuple[int, str, int]:
    """A drive that nobody has read yet wants a look."""
    word = CallWord.LOOK if line.call is None else line.call.word
    return -word.rank, (line.label or line.place.device).casefold(), line.number
