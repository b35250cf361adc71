"""What depends on all rows of a drive, put in order after some came from elsewhere.

Whoever calls holds the transaction open; every function raises sqlite3.Error where it cannot be written.
"""

import sqlite3
from collections.abc import Iterable, Sequence

from diskwatch.history import rows
from diskwatch.history.counting import count
from diskwatch.records import Call

Made = tuple[int, int]
"""Which pass it was: its time, UTC seconds since 1970, and which of those of its second."""


def settle_counts(connection: sqlite3.Connection, drive: int, uncounted: Iterable[Made]) -> None:
    """Count passes that fall behind the mark now and that neither side has counted."""
    for at, nth in uncounted:
        found = connection.execute(
            "SELECT at, outcome FROM pass WHERE drive = ? AND at = ? AND nth = ?", (drive, at, nth)
        ).fetchall()
        count(connection, drive, found)


def settle_calls(connection: sqlite3.Connection, drive: int, arrived: Sequence[Call]) -> None:
    """All calls in order of time: the last one stands."""
    kept = connection.execute(
        "SELECT at, word, cause, cause_probability, cause_second, reason, rule, evidence FROM call"
        " WHERE drive = ? ORDER BY number",
        (drive,),
    ).fetchall()
    here = [rows.call(row) for row in kept]
    known = {(call.at, call.word) for call in here}
    new = [call for call in arrived if (call.at, call.word) not in known]
    if not new:
        return
    connection.execute("DELETE FROM call WHERE drive = ?", (drive,))
    connection.executemany(
        "INSERT INTO call (drive, at, word, cause, cause_probability, cause_second, reason, rule, evidence)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",
        [(drive, *rows.call_row(call)) for call in sorted((*here, *new), key=lambda call: call.at)],
    )


def settle_signals(connection: sqlite3.Connection, drive: int) -> None:
    """What every signal is now, by its newest value; the series that has it is the current one."""
    newest: dict[str, tuple[int, int, int]] = {}
    series = connection.execute(
        "SELECT number, signal FROM series WHERE drive = ? AND kind IS NOT NULL", (drive,)
    ).fetchall()
    for number, signal in series:
        found = connection.execute(
            "SELECT turn, at, value, reason FROM (SELECT turn, at, nth, value, reason FROM value"
            " WHERE series = ?1 UNION ALL SELECT turn, at, nth, value, reason FROM fresh WHERE series = ?1)"
            " ORDER BY turn DESC, at DESC, nth DESC LIMIT 1",
            (number,),
        ).fetchone()
        if found is None:
            continue
        turn, *now = found
        connection.execute(
            "INSERT INTO latest (since, value, reason, series) VALUES (?, ?, ?, ?) ON CONFLICT (series)"
            " DO UPDATE SET since = excluded.since, value = excluded.value, reason = excluded.reason",
            (*now, number),
        )
        one = (turn, now[0], number)
        newest[signal] = max(newest.get(signal, one), one)
    connection.execute(
        "INSERT INTO latest (series, day, evidence) SELECT series, max(day), evidence FROM evidence"
        " WHERE series IN (SELECT number FROM series WHERE drive = ?) GROUP BY series ON CONFLICT (series)"
        " DO UPDATE SET day = excluded.day, evidence = excluded.evidence"
        " WHERE excluded.day > coalesce(day, -1)",
        (drive,),
    )
    for signal, (*_, number) in newest.items():
        connection.execute("UPDATE series SET current = 0 WHERE drive = ? AND signal = ?", (drive, signal))
        connection.execute("UPDATE series SET current = 1 WHERE number = ?", (number,))


def settle_last_pass(connection: sqlite3.Connection, drive: int) -> None:
    """How the drive's last pass went, and in which turn it was."""
    connection.execute(
        "UPDATE drive SET (passed_at, outcome, explanation, turn) ="
        " (SELECT at, outcome, explanation, turn FROM pass WHERE drive = number"
        " ORDER BY turn DESC, at DESC, nth DESC LIMIT 1)"
        " WHERE number = ? AND EXISTS (SELECT 1 FROM pass WHERE drive = number)",
        (drive,),
    )
