"""A drive's past, taken out as rows that can travel."""

import json
import sqlite3
from collections.abc import Iterator
from typing import Any

from diskwatch.history import packing, rows
from diskwatch.history.exchange import Line


def lines_of(connection: sqlite3.Connection, drive: int) -> Iterator[Line]:
    """All rows of a drive, in the order in which they are best taken in.

    Args:
        connection: to the history, within a transaction, so that all is of one moment.
        drive: the drive's number.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    for record, sql in _QUERIES.items():
        found = connection.execute(sql, {"drive": drive})
        names = [column[0] for column in found.description]
        for row in found:
            fields = _FIELDS.get(record, dict)(dict(zip(names, row, strict=True)))
            yield Line(record=record, drive=drive, at=fields.pop("at"), fields=fields)


def _drive(row: dict[str, Any]) -> dict[str, Any]:
    names = {key: rows.name(row[key]) for key in ("wwn", "model", "serial", "path")}
    sizes = {key: rows.value(row[key]) for key in ("capacity_bytes", "rotation_rpm")}
    return {**row, **{key: _travelling(name) for key, name in names.items()}, **sizes}


def _travelling(name: str | None) -> str | None:
    """A name as a file can hold it; halves of surrogate pairs, which no UTF-8 has, become escapes."""
    return rows.text_or_none(name)


def _value(row: dict[str, Any]) -> dict[str, Any]:
    return {**row, "value": rows.value(row["value"])}


def _unpacked(row: dict[str, Any]) -> dict[str, Any]:
    return {"at": row["at"], "turn": row["turn"], "state": packing.unpacked(row["packed"])}


def _beside(row: dict[str, Any]) -> dict[str, Any]:
    packed = row.pop("packed")
    return {**row, "reading": json.loads(packed)}


def _reading(row: dict[str, Any]) -> dict[str, Any]:
    return {"at": row["at"], "reading": json.loads(packing.unpacked(row["packed"]))}


def _answer(row: dict[str, Any]) -> dict[str, Any]:
    return {"at": row["at"], "call": row["call"], "text": rows.text(packing.unpacked(row["packed"]))}


def _learnt(row: dict[str, Any]) -> dict[str, Any]:
    return {"at": row["at"], "state": packing.unpacked(row["packed"])}


def _probe(row: dict[str, Any]) -> dict[str, Any]:
    packed = row.pop("packed")
    return {**row, "times": json.loads(packing.unpacked(packed))}


def _load(row: dict[str, Any]) -> dict[str, Any]:
    return {**row, "histogram": sorted(packing.histogram(row["histogram"]).items())}


def _data(row: dict[str, Any]) -> dict[str, Any]:
    return {**row, "data": json.loads(row["data"])}


def _finding(row: dict[str, Any]) -> dict[str, Any]:
    return {**_data(row), "signals": json.loads(row["signals"])}


_QUERIES = {
    "drive": "SELECT first_seen AS at, wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
    " device, bay FROM drive WHERE number = :drive",
    "owner": "SELECT at, fact, value FROM owner_fact WHERE drive = :drive",
    "place": "SELECT since AS at, device, bay FROM plugged WHERE drive = :drive",
    "passes": "SELECT first AS at, outcome, passes, last FROM pass_day WHERE drive = :drive",
    "pass": "SELECT at, nth, turn, outcome, exit_bits, took_ms, text AS explanation, at < coalesce("
    "(SELECT before FROM thinned WHERE what = 'pass' AND number = :drive), at) AS counted FROM pass"
    " LEFT JOIN sentence ON sentence.number = explanation WHERE drive = :drive ORDER BY at, nth",
    "value": "SELECT at, nth, stated.turn AS turn, signal, value, unit, kind, source, reason FROM series"
    " JOIN (SELECT at, nth, turn, value, reason, series FROM value"
    " UNION ALL SELECT at, nth, turn, value, reason, series FROM fresh)"
    " AS stated ON stated.series = series.number"
    " WHERE drive = :drive AND kind IS NOT NULL ORDER BY series.number, at, nth",
    "beside": "SELECT at, nth, turn, packed FROM beside WHERE drive = :drive",
    "evidence": "SELECT day * 86400 AS at, signal, evidence.evidence AS evidence FROM evidence"
    " JOIN series ON series.number = series WHERE drive = :drive AND day IS NOT"
    " (SELECT latest.day FROM latest WHERE latest.series = evidence.series)"
    " UNION SELECT day * 86400, signal, latest.evidence FROM latest"
    " JOIN series ON series.number = series WHERE drive = :drive AND latest.evidence IS NOT NULL",
    "heard": "SELECT first_seen AS at, signal, total FROM heard JOIN drive ON drive.number = heard.drive"
    " WHERE heard.drive = :drive",
    "reading": "SELECT at, packed FROM last_reading WHERE drive = :drive",
    "answer": "SELECT at, call, packed FROM answer WHERE drive = :drive",
    "latency": "SELECT through * 86400 AS at, packed FROM latency_state WHERE drive = :drive",
    "forecast": "SELECT made_on_day * 86400 AS at, signal, at_limit, limit_from, low, high, probability,"
    " reason, reached FROM forecast WHERE drive = :drive ORDER BY signal, made_on_day",
    "probe": "SELECT at, place, disk_ms, packed FROM probe WHERE drive = :drive ORDER BY at",
    "load": "SELECT day * 86400 AS at, load_class, direction, rollups, operations, histogram FROM io_day"
    " WHERE drive = :drive",
    "finding": "SELECT since AS at, name, kind, signals, calls, cause, evidence, sentence, data, closed"
    " FROM finding WHERE drive = :drive ORDER BY number",
    "call": "SELECT at, word, cause, cause_probability, cause_second, reason, rule, evidence FROM call"
    " WHERE drive = :drive ORDER BY number",
    "event": "SELECT at, kind, text, data FROM day_book WHERE drive = :drive ORDER BY number",
    "copy": "SELECT at, turn, packed FROM kept_state WHERE drive = :drive ORDER BY at",
    "state": "SELECT at, turn, packed FROM analyser_state WHERE drive = :drive",
}
_FIELDS = {
    "drive": _drive,
    "value": _value,
    "beside": _beside,
    "reading": _reading,
    "answer": _answer,
    "latency": _learnt,
    "probe": _probe,
    "load": _load,
    "finding": _finding,
    "event": _data,
    "copy": _unpacked,
    "state": _unpacked,
}
