"""Forecasts, each kept with the day it was made on, its limit, and the day on which that was reached."""

import sqlite3
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from diskwatch.history import rows
from diskwatch.records import Forecast, LimitSource

_COLUMNS = "signal, made_on_day, at_limit, limit_from, low, high, probability, reason"

# From one signal to the next by the key: of years of forecasts none but the latest is looked at.
_LATEST = f"""
    WITH RECURSIVE named (drive, signal) AS (
        SELECT number, (SELECT min(signal) FROM forecast WHERE drive = number) FROM drive
        UNION ALL
        SELECT drive, (SELECT min(signal) FROM forecast AS other
            WHERE other.drive = named.drive AND other.signal > named.signal)
        FROM named WHERE signal IS NOT NULL
    )
    SELECT drive, {_COLUMNS} FROM named CROSS JOIN forecast USING (drive, signal)
    WHERE made_on_day = (SELECT max(made_on_day) FROM forecast AS other
        WHERE other.drive = named.drive AND other.signal = named.signal)
    ORDER BY drive, signal
"""  # noqa: S608  # our own columns


@dataclass(frozen=True, slots=True, kw_only=True)
class Kept:
    """A forecast and what became of it.

    Attributes:
        forecast: what was said.
        reached: UTC day number on which the signal came to the limit; None where it did not.
    """

    forecast: Forecast
    reached: int | None


def write_forecasts(connection: sqlite3.Connection, drive: int, made: Iterable[Forecast]) -> None:
    """Keep forecasts; one whose limit is reached settles all earlier ones about its signal.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    for one in made:
        connection.execute(
            f"INSERT OR REPLACE INTO forecast (drive, {_COLUMNS}) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",  # noqa: S608  # our own columns
            (drive, *_row(one)),
        )
        if one.high == 0:
            connection.execute(
                "UPDATE forecast SET reached = ?"
                " WHERE drive = ? AND signal = ? AND reached IS NULL AND made_on_day < ?",
                (one.made_on_day, drive, rows.text(one.signal), one.made_on_day),
            )


def latest_forecasts(
    connection: sqlite3.Connection,
    decode: Callable[[int, rows.Row], Forecast | None] = lambda _drive, row: forecast(row),
) -> dict[int, tuple[Forecast, ...]]:
    """The latest forecast about each signal, by the drive's number.

    Args:
        connection: to the history.
        decode: makes a forecast of a drive's row; where it gives None the forecast is left out.
    """
    found: dict[int, list[Forecast]] = {}
    for drive, *row in connection.execute(_LATEST):
        made = decode(drive, tuple(row))
        if made is not None:
            found.setdefault(drive, []).append(made)
    return {drive: tuple(forecasts) for drive, forecasts in found.items()}


def kept_forecasts(connection: sqlite3.Connection, drive: int) -> tuple[Kept, ...]:
    """Every forecast about a drive with what became of it, by signal, oldest first."""
    found = connection.execute(
        f"SELECT {_COLUMNS}, reached FROM forecast WHERE drive = ? ORDER BY signal, made_on_day",  # noqa: S608  # likewise
        (drive,),
    ).fetchall()
    return tuple(Kept(forecast=forecast(row[:-1]), reached=row[-1]) for row in found)


def _row(one: Forecast) -> tuple[rows.Cell, ...]:
    return (
        rows.text(one.signal),
        one.made_on_day,
        float(one.limit),
        one.limit_from.value,
        one.low,
        one.high,
        one.probability,
        rows.text_or_none(one.reason),
    )


def forecast(row: rows.Row) -> Forecast:
    """From ``signal, made_on_day, at_limit, limit_from, low, high, probability, reason``."""
    signal, made_on_day, limit, limit_from, low, high, probability, reason = row
    return Forecast(
        signal=signal,
        limit=limit,
        made_on_day=made_on_day,
        low=low,
        high=high,
        probability=probability,
        reason=reason,
        limit_from=LimitSource(limit_from),
    )
