"""What each drive's latency was learnt from, and the days of traffic that it has not taken in yet.

It is large and moves once a day, so it stands apart from the analyser's state, which every pass rewrites.
"""

import sqlite3

from diskwatch.history import packing, rows
from diskwatch.history.traffic import FIVE, rollups
from diskwatch.records import IoRollup, Learnt
from diskwatch.units import DAY


def learnt(connection: sqlite3.Connection, drive: int) -> Learnt | None:
    """What a drive's latency was learnt from, as last kept; None before the first day."""
    found = connection.execute("SELECT through, packed FROM latency_state WHERE drive = ?", (drive,)).fetchone()
    return None if found is None else Learnt(through=found[0], state=packing.unpacked(found[1]))


def write_learnt(connection: sqlite3.Connection, drive: int, kept: Learnt) -> None:
    """Keep what a drive's latency was learnt from; what was kept of it before goes."""
    connection.execute(
        "INSERT OR REPLACE INTO latency_state (drive, through, packed) VALUES (?, ?, ?)",
        (drive, kept.through, packing.packed(kept.state)),
    )


def traffic_days(
    connection: sqlite3.Connection, drive: int, *, after: int | None, before: int, most: int
) -> tuple[tuple[int, tuple[IoRollup, ...]], ...]:
    """A drive's traffic by day, oldest first; days without any are left out.

    Args:
        connection: to the history.
        drive: the drive's number.
        after: leave out this UTC day number and all before it; None for none.
        before: first UTC day number not wanted any more.
        most: how many days to give at most.
    """
    found: list[tuple[int, tuple[IoRollup, ...]]] = []
    since = -(2**62) if after is None else rows.slot((after + 1) * DAY, 0, FIVE)
    until = rows.slot(before * DAY, 0, FIVE)
    while len(found) < most:
        first = connection.execute(
            "SELECT at FROM io_five WHERE slot >= ? AND slot < ? AND drive = ? ORDER BY slot LIMIT 1",
            (since, until, drive),
        ).fetchone()
        if first is None:
            break
        day = first[0] // DAY
        found.append((day, rollups(connection, day * DAY, (day + 1) * DAY, drive)))
        since = rows.slot((day + 1) * DAY, 0, FIVE)
    return tuple(found)
