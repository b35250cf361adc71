"""Which pass of a drive it was: where it stands among all of its passes, whatever the clock did."""

import sqlite3
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Moment:
    """The place of a pass among all passes of its drive, in the order in which they were made.

    Attributes:
        turn: how often the clock had been set back under the drive.
        at: UTC seconds since 1970.
        nth: which of those of its second, from 0.
    """

    turn: int
    at: int
    nth: int


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class Dated:
    """The analyser's state after all passes of a second; the later one is the greater.

    Attributes:
        turn: how often the clock had been set back under the drive.
        at: UTC seconds since 1970.
        state: the state.
    """

    turn: int
    at: int
    state: str


def turn_at(connection: sqlite3.Connection, drive: int, at: int) -> int:
    """The turn of a drive's last pass up to a time.

    Args:
        connection: to the history.
        drive: the drive's number.
        at: UTC seconds since 1970.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    found = connection.execute(
        "SELECT turn FROM pass WHERE drive = ? AND at <= ? ORDER BY at DESC, nth DESC LIMIT 1", (drive, at)
    ).fetchone()
    return 0 if found is None else int(found[0])
