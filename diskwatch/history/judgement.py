"""What is thought of a drive, written: findings, evidence, the call, and the state that it all came from."""

import sqlite3
from collections.abc import Mapping, Sequence

from diskwatch.history import packing, rows
from diskwatch.history.forecasts import write_forecasts
from diskwatch.history.latency import write_learnt
from diskwatch.history.probes import write_probe
from diskwatch.records import Call, DriveRound, Finding
from diskwatch.units import DAY, day_number

WEEK = 7 * DAY
"""The last state of every such stretch since 1970 is kept, seconds."""


def write_judgement(connection: sqlite3.Connection, part: DriveRound, at: int) -> None:
    """Write what is thought of a drive, without the pass that led to it.

    Args:
        connection: within a transaction.
        part: whose findings, evidence, call and state to write.
        at: when it was judged, UTC seconds since 1970.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    number = part.known.number
    _write_findings(connection, number, part.findings, at)
    _write_evidence(connection, number, part.evidence, at)
    if part.call is not None:
        _write_call(connection, number, part.call)
    if part.state is not None:
        _write_state(connection, number, part.pass_.at, packing.packed(part.state))
    if part.learnt is not None:
        write_learnt(connection, number, part.learnt)
    if part.probe is not None:
        write_probe(connection, number, part.probe)
    write_forecasts(connection, number, part.forecasts)


def keep_copy(connection: sqlite3.Connection, number: int, at: int) -> None:
    """Keep the last state of a week that is over, as it is: what came later can be worked out from it again."""
    connection.execute(
        "INSERT INTO kept_state (drive, at, packed, turn)"
        " SELECT drive, at, packed, turn FROM analyser_state WHERE drive = ? AND at / ? <> ? / ?"
        " ON CONFLICT (drive, at) DO UPDATE SET packed = excluded.packed, turn = excluded.turn"
        " WHERE excluded.turn > turn",
        (number, WEEK, at, WEEK),
    )


def _write_findings(connection: sqlite3.Connection, number: int, findings: Sequence[Finding], at: int) -> None:
    standing = {
        row[1]: (row[0], row[1:])
        for row in connection.execute(
            "SELECT number, name, kind, signals, since, calls, cause, evidence, sentence, data"
            " FROM finding WHERE drive = ? AND closed IS NULL",
            (number,),
        )
    }
    for row in map(rows.finding_row, {finding.name: finding for finding in findings}.values()):
        known = standing.pop(row[0], None)
        if known is None:
            connection.execute(
                "INSERT INTO finding"
                " (drive, name, kind, signals, since, calls, cause, evidence, sentence, data)"
                " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                (number, *row),
            )
        elif known[1] != row:
            connection.execute(
                "UPDATE finding SET name = ?, kind = ?, signals = ?, since = ?, calls = ?, cause = ?,"
                " evidence = ?, sentence = ?, data = ? WHERE number = ?",
                (*row, known[0]),
            )
    connection.executemany(
        "UPDATE finding SET closed = ? WHERE number = ?", [(at, ended) for ended, _ in standing.values()]
    )


def _write_evidence(
    connection: sqlite3.Connection, number: int, evidence: Mapping[str, float], at: int
) -> None:
    """Keep the last evidence of each day: today's in ``latest``, from where the next day moves it on."""
    today = day_number(at)
    standing = {
        signal: (series, day, days)
        for signal, series, day, days in connection.execute(
            "SELECT signal, number, day, evidence FROM series JOIN latest ON series = number"
            " WHERE drive = ? AND current AND day IS NOT NULL AND evidence IS NOT NULL",
            (number,),
        )
    }
    moved: list[tuple[int, int, float]] = []
    ended: list[tuple[int]] = []
    for name, days in {rows.text(signal): days for signal, days in evidence.items()}.items():
        series, day, before = standing.get(name, (None, None, None))
        if (day, before) == (today, days):
            continue
        if series is None:
            series = _series_of(connection, number, name)
        elif day != today:
            ended.append((series,))
        moved.append((series, today, days))
    if ended:
        connection.executemany(
            "INSERT OR REPLACE INTO evidence (series, day, evidence)"
            " SELECT series, day, evidence FROM latest WHERE series = ?",
            ended,
        )
    connection.executemany(
        "INSERT INTO latest (series, day, evidence) VALUES (?, ?, ?)"
        " ON CONFLICT (series) DO UPDATE SET day = excluded.day, evidence = excluded.evidence",
        moved,
    )


def _series_of(connection: sqlite3.Connection, number: int, name: str) -> int:
    """The number of a signal's series; some ledgers follow what no drive reports, such as a service time."""
    found = connection.execute(
        "SELECT number FROM series WHERE drive = ? AND signal = ? AND current", (number, name)
    ).fetchone()
    if found is None:
        found = connection.execute(
            "INSERT INTO series (drive, signal) VALUES (?, ?) RETURNING number", (number, name)
        ).fetchone()
    return int(found[0])


def _write_call(connection: sqlite3.Connection, number: int, call: Call) -> None:
    """Keep changes of call; a call that stands on has its reason and numbers brought up to date."""
    row = rows.call_row(call)
    standing = connection.execute(
        "SELECT number, at, word, cause, cause_probability, cause_second, reason, rule, evidence"
        " FROM call WHERE drive = ? ORDER BY number DESC LIMIT 1",
        (number,),
    ).fetchone()
    if standing is not None and standing[1:] == row:
        return
    if standing is not None and standing[1:3] == row[:2]:
        connection.execute(
            "UPDATE call SET at = ?, word = ?, cause = ?, cause_probability = ?, cause_second = ?,"
            " reason = ?, rule = ?, evidence = ? WHERE number = ?",
            (*row, standing[0]),
        )
    else:
        connection.execute(
            "INSERT INTO call"
            " (drive, at, word, cause, cause_probability, cause_second, reason, rule, evidence)"
            " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",
            (number, *row),
        )


def _write_state(connection: sqlite3.Connection, number: int, at: int, packed: bytes) -> None:
    connection.execute(
        "INSERT INTO analyser_state (drive, at, packed, turn)"
        " VALUES (?1, ?2, ?3, (SELECT turn FROM drive WHERE number = ?1)) ON CONFLICT (drive) DO UPDATE"
        " SET at = excluded.at, packed = excluded.packed, turn = excluded.turn WHERE packed <> excluded.packed",
        (number, at, packed),
    )
