"""The past of drives as a file that travels: our own layout, as JSON or as CSV. Pure.

Both hold the same rows. A row has a ``record`` (what it is), a ``drive`` (which drive of the file), mostly an
``at``, and the record's own fields:

| record | fields |
| --- | --- |
| drive | wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm, device, bay; at: first seen |
| owner | fact, value |
| place | device, bay |
| pass | outcome, exit_bits, took_ms, explanation |
| passes | outcome, passes, last: of passes thinned, how many of a day ended so; at: the first |
| value | signal, value, unit, kind, source, reason: on change |
| beside | reading: failing attributes, self-tests and limits, on change |
| reading | reading: attribute table, self-test log and limits as last read |
| answer | text, call: what smartctl last printed of the drive, and the call after it |
| evidence | signal, evidence: M in days at the end of the day |
| heard | signal, total: what is counted of it besides its own word, since it is listened to |
| latency | state: what its usual times were learnt from, through that day |
| forecast | signal, at_limit, limit_from, low, high, probability, reason, reached: of the day it was made on |
| finding | as it stands or stood; closed: since when no longer |
| call | as it was |
| event | kind, text, data: an entry of the day book |
| probe | place, disk_ms, times: of the reads of its band and of its slice, microseconds |
| load | class, direction, rollups, operations, histogram: of the day |
| copy | state: the analyser's, as it was then |
| state | state: the analyser's, as it is |

Where a row belongs to a pass, ``nth`` tells which of those of its second it was, from 0, and ``turn`` how often
the clock had been set back before: by turn, time and nth passes stand in the order in which they were made.

In JSON each row is an object, times are RFC 3339, and whole numbers beyond 2^53 are written
``{"digits": "..."}``. In CSV the columns are ``record, drive, at, fields``, the last one a JSON object. Traffic
by the minute and by five minutes stays where it was measured: the days' histograms hold what lasts of it.
"""

import csv
import io
import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Literal

from diskwatch.errors import UsageError
from diskwatch.units import epoch_of, plain, rfc3339

SCHEMA = "diskwatch/history/1"
_COLUMNS = ("record", "drive", "at", "fields")
_EXACT = 2**53
_LONGEST_FIELD = 1 << 24


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """One row of such a file.

    Attributes:
        record: what it is.
        drive: which drive of the file.
        at: when, UTC seconds since 1970.
        fields: the record's own fields, plain JSON values.
        number: where in the file it stands, for complaints.
    """

    record: str
    drive: int
    at: int
    fields: Mapping[str, Any]
    number: int = 0


def written(lines: Iterable[Line], form: Literal["csv", "json"], at: int) -> Iterator[str]:
    """The file's text in pieces.

    Args:
        lines: the rows.
        form: how to write them.
        at: now, UTC seconds since 1970.
    """
    if form == "csv":
        yield _csv_row(_COLUMNS)
        for line in lines:
            yield _csv_row((line.record, line.drive, rfc3339(line.at), _json(line.fields)))
        return
    yield f'{{"schema":{_json(SCHEMA)},"at":{_json(rfc3339(at))},"rows":['
    begin = "\n"
    for line in lines:
        head = {"record": line.record, "drive": line.drive, "at": rfc3339(line.at)}
        yield begin + _json({**head, **line.fields})
        begin = ",\n"
    yield "\n]}\n"


def read(text: str) -> tuple[tuple[Line, ...], tuple[str, ...]]:
    """The rows of such a file, in either form, and what is wrong with those that are left out.

    Raises:
        UsageError: it is no such file.
    """
    rows = _json_rows(text) if text.lstrip()[:1] in {"{", "["} else _csv_rows(text)
    lines: list[Line] = []
    wrong: list[str] = []
    for number, row in rows:
        try:
            lines.append(_line(row, number))
        except (ValueError, TypeError, OverflowError) as error:
            wrong.append(f"row {number} is left out: {plain(str(error))}")
    return tuple(lines), tuple(wrong)


def _json(thing: object) -> str:
    return json.dumps(_outward(thing), separators=(",", ":"), ensure_ascii=False)


def _outward(thing: Any) -> Any:
    if isinstance(thing, int) and not isinstance(thing, bool) and not -_EXACT <= thing <= _EXACT:
        return {"digits": str(thing)}
    if isinstance(thing, Mapping):
        return {str(key): _outward(value) for key, value in thing.items()}
    if isinstance(thing, list | tuple):
        return [_outward(value) for value in thing]
    return thing


def _inward(thing: Any) -> Any:
    if isinstance(thing, dict):
        if thing.keys() == {"digits"} and isinstance(thing["digits"], str):
            return int(thing["digits"])
        return {key: _inward(value) for key, value in thing.items()}
    if isinstance(thing, list):
        return [_inward(value) for value in thing]
    return thing


def _csv_row(cells: Iterable[object]) -> str:
    out = io.StringIO()
    csv.writer(out, lineterminator="\n").writerow(cells)
    return out.getvalue()


def _json_rows(text: str) -> Iterator[tuple[int, Any]]:
    try:
        whole = json.loads(text)
    except (ValueError, RecursionError) as error:
        raise UsageError(f"the file is no whole JSON: {plain(str(error))}") from error
    if not isinstance(whole, dict) or whole.get("schema") != SCHEMA or not isinstance(whole.get("rows"), list):
        raise UsageError(
            f"the file is no exported history: its schema is not {SCHEMA}",
            hint="name a file that 'diskwatch export-history' wrote",
        )
    yield from enumerate(whole["rows"], start=1)


def _csv_rows(text: str) -> Iterator[tuple[int, Any]]:
    csv.field_size_limit(_LONGEST_FIELD)
    reader = csv.reader(io.StringIO(text, newline=""))
    if tuple(next(reader, [])) != _COLUMNS:
        raise UsageError(
            f"the file is no exported history: its first line is not {','.join(_COLUMNS)}",
            hint="name a file that 'diskwatch export-history' wrote",
        )
    number = 1
    while True:
        number += 1
        try:
            cells = next(reader)
        except StopIteration:
            return
        except csv.Error as error:
            yield number, error
            continue
        yield number, _csv_fields(cells)


def _csv_fields(cells: list[str]) -> Any:
    if len(cells) != len(_COLUMNS):
        return ValueError(f"it has {len(cells)} columns, not {len(_COLUMNS)}")
    record, drive, at, fields = cells
    try:
        found = json.loads(fields)
        return {"record": record, "drive": int(drive), "at": at, **found}
    except (ValueError, TypeError, RecursionError) as error:
        return ValueError(str(error))


def _line(row: Any, number: int) -> Line:
    if isinstance(row, Exception):
        raise ValueError(str(row)) from row  # noqa: TRY004  # the file is wrong, not our caller
    if not isinstance(row, dict):
        raise ValueError("it is no object")  # noqa: TRY004  # likewise
    fields = _inward(row)
    record, drive, at = (fields.pop(name, None) for name in ("record", "drive", "at"))
    if not isinstance(record, str) or isinstance(drive, bool) or not isinstance(drive, int):
        raise ValueError("it does not say what it is, or of which drive")  # noqa: TRY004  # likewise
    if not isinstance(at, str):
        raise ValueError("its time is no text")  # noqa: TRY004  # likewise
    return Line(record=record, drive=drive, at=epoch_of(at), fields=fields, number=number)
