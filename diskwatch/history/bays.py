"""All that the history knows of its drives now, read in one go from the small tables that hold it."""

import sqlite3
from collections import defaultdict

from diskwatch.history import rows
from diskwatch.history.forecasts import latest_forecasts
from diskwatch.records import Call, CallWord, DriveLine, Finding, SignalNow
from diskwatch.records.owner import LABEL, owner_facts


def drive_lines(connection: sqlite3.Connection) -> tuple[DriveLine, ...]:
    """Every drive, worst call first, then by label or device; without traffic.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    said = _said(connection)
    calls = standing_calls(connection)
    findings = _findings(connection)
    signals = _signals(connection)
    forecasts = latest_forecasts(connection)
    found = connection.execute(
        "SELECT drive.number, wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
        " device, bay, lives_here, first_seen, passed_at, outcome, sentence.text"
        " FROM drive LEFT JOIN sentence ON sentence.number = drive.explanation"
    ).fetchall()
    lines = []
    for row in found:
        known = rows.known_drive(row[:13])
        lines.append(
            DriveLine(
                number=known.number,
                drive=known.drive,
                place=known.place,
                label=said[known.number].get(LABEL, ("", 0))[0] or None,
                first_seen=known.first_seen,
                last_pass=rows.last_pass(row[13:]),
                call=calls.get(known.number),
                findings=tuple(sorted(findings[known.number], key=_leading)),
                signals=tuple(signals[known.number]),
                forecasts=forecasts.get(known.number, ()),
                owner=owner_facts(said[known.number]),
            )
        )
    return tuple(sorted(lines, key=_worst))


def standing_calls(connection: sqlite3.Connection) -> dict[int, Call]:
    """The call that stands for each drive, by the drive's number."""
    found = connection.execute(
        "SELECT drive, at, word, cause, cause_probability, cause_second, reason, rule, evidence"
        " FROM call WHERE number IN (SELECT max(number) FROM call GROUP BY drive)"
    ).fetchall()
    return {row[0]: rows.call(row[1:]) for row in found}


def _said(connection: sqlite3.Connection) -> defaultdict[int, dict[str, tuple[str, int]]]:
    """What the owner said of each drive, with the time of saying, by the fact's name."""
    found: defaultdict[int, dict[str, tuple[str, int]]] = defaultdict(dict)
    for drive, fact, value, at in connection.execute("SELECT drive, fact, value, at FROM owner_fact"):
        found[drive][fact] = (value, at)
    return found


def _findings(connection: sqlite3.Connection) -> defaultdict[int, list[Finding]]:
    found: defaultdict[int, list[Finding]] = defaultdict(list)
    for row in connection.execute(
        "SELECT drive, name, kind, signals, since, calls, cause, evidence, sentence, data"
        " FROM finding WHERE closed IS NULL ORDER BY number"
    ):
        found[row[0]].append(rows.finding(row[1:]))
    return found


def _signals(connection: sqlite3.Connection) -> defaultdict[int, list[SignalNow]]:
    found: defaultdict[int, list[SignalNow]] = defaultdict(list)
    for drive, name, value, unit, since, evidence in connection.execute(
        "SELECT drive, signal, value, unit, since, evidence"
        " FROM series JOIN latest ON latest.series = series.number"
        " WHERE current AND since IS NOT NULL ORDER BY drive, signal"
    ):
        found[drive].append(
            SignalNow(name=name, value=rows.value(value), unit=unit, since=since, evidence=evidence)
        )
    return found


def _leading(finding: Finding) -> tuple[int, bool, float, str]:
    """Worst call first; of the same call what needs no evidence, then the strongest evidence."""
    rank = -1 if finding.calls is None else finding.calls.rank
    return -rank, finding.evidence is not None, -(finding.evidence or 0.0), finding.name


def _worst(line: DriveLine) -> tuple[int, str, int]:
    """A drive that nobody has read yet wants a look."""
    word = CallWord.LOOK if line.call is None else line.call.word
    return -word.rank, (line.label or line.place.device).casefold(), line.number
