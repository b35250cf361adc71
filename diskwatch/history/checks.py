"""Which cells of a history cannot be right, table by table, and what is done about each sort."""

import json
from collections.abc import Callable
from dataclasses import dataclass

from diskwatch.history import packing, rows
from diskwatch.history.forecasts import forecast
from diskwatch.language import marked
from diskwatch.records import Kind, Outcome, SignalKind

Readable = Callable[[str], object]
"""Raises ValueError for a text that is no state of the analyser."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """Which rows of a table cannot be right, and what is done about them.

    Attributes:
        table: the table.
        key: columns that tell its rows apart.
        cells: columns that are looked at.
        decode: raises ValueError where these cells cannot be right.
        what: what is lost with them, to begin a sentence.
        put: what stands there from then on; None where the row is taken out.
        drive: which drive it concerns, in SQL.
        suspects: which rows need a look at all, in SQL.
        judged: whether the drive is to be judged anew.
    """

    table: str
    key: tuple[str, ...]
    cells: tuple[str, ...]
    decode: Callable[..., object]
    what: str
    put: str | None = None
    drive: str = "drive"
    suspects: str = "1"
    judged: bool = False


def _object(words: str) -> None:
    if not isinstance(json.loads(words), dict):
        raise ValueError(f"no JSON object: {words[:80]!r}")  # noqa: TRY004  # the file is wrong, not our caller


_OUTCOMES = ", ".join(f"'{one.value}'" for one in Outcome)
_KINDS = ", ".join(f"'{one.value}'" for one in SignalKind)
_CALL = ("at", "word", "cause", "cause_probability", "cause_second", "reason", "rule", "evidence")
_FINDING = ("name", "kind", "signals", "since", "calls", "cause", "evidence", "sentence", "data")
_FORECAST = ("signal", "made_on_day", "at_limit", "limit_from", "low", "high", "probability", "reason")
_LOST = "value = NULL, reason = 'what was read is lost: the history was damaged'"
_ITS_LAST_ONE = (
    "(passed_at, outcome, explanation) = (SELECT at, outcome, explanation FROM pass"
    " WHERE pass.drive = drive.number ORDER BY turn DESC, at DESC, nth DESC LIMIT 1)"
)


def first(readable: Readable) -> tuple[Check, ...]:
    """What a watch begins with."""
    return (
        Check(
            table="drive",
            key=("number",),
            cells=("kind",),
            decode=Kind,
            what=marked("What sort of device it is"),
            # Its next answer tells; until then it is what most of its words speak for.
            put="kind = CASE WHEN rotation_rpm > 0 THEN 'hdd'"
            " WHEN device LIKE '%nvme%' THEN 'nvme' ELSE 'ssd' END",
            drive="number",
        ),
        Check(
            table="drive",
            key=("number",),
            cells=("lives_here",),
            decode=rows.mounts,
            what=marked("What lives on it"),
            put="lives_here = '[]'",
            drive="number",
        ),
        *(
            Check(
                table="drive",
                key=("number",),
                cells=(name,),
                decode=rows.number,
                what=what,
                put=f"{name} = NULL",
                drive="number",
            )
            for name, what in (
                ("capacity_bytes", marked("Its size")),
                ("rotation_rpm", marked("How fast it turns")),
            )
        ),
        Check(
            table="analyser_state",
            key=("drive",),
            cells=("packed",),
            decode=lambda packed: readable(packing.unpacked(packed)),
            what=marked("The state of its ledgers"),
            judged=True,
        ),
        Check(
            table="latency_state",
            key=("drive",),
            cells=("packed",),
            decode=packing.unpacked,
            what=marked("What its usual times were learnt from"),
        ),
        Check(
            table="call",
            key=("number",),
            cells=_CALL,
            decode=lambda *cells: rows.call(cells),
            what=marked("A call"),
            judged=True,
        ),
        Check(
            table="finding",
            key=("number",),
            cells=_FINDING,
            decode=lambda *cells: rows.finding(cells),
            what=marked("A finding"),
            judged=True,
        ),
        Check(
            table="forecast",
            key=("drive", "signal", "made_on_day"),
            cells=_FORECAST,
            decode=lambda *cells: forecast(cells),
            what=marked("A forecast"),
        ),
    )


MORE = (
    *(
        Check(
            table=table,
            key=key,
            cells=("outcome",),
            decode=Outcome,
            what=what,
            suspects=f"outcome NOT IN ({_OUTCOMES})",
        )
        for table, key, what in (
            ("pass", ("drive", "at", "nth"), marked("How a pass went")),
            ("pass_day", ("drive", "day", "outcome"), marked("How some passes of a day went")),
        )
    ),
    Check(
        table="drive",
        key=("number",),
        cells=("outcome",),
        decode=Outcome,
        what=marked("How its last pass went"),
        put=_ITS_LAST_ONE,
        drive="number",
        suspects=f"passed_at IS NOT NULL AND (outcome IS NULL OR outcome NOT IN ({_OUTCOMES}))",
    ),
    Check(
        table="series",
        key=("number",),
        cells=("kind",),
        decode=SignalKind,
        what=marked("Of what kind a signal is"),
        put="kind = NULL",
        suspects=f"kind IS NOT NULL AND kind NOT IN ({_KINDS})",
    ),
    *(
        Check(
            table=table,
            key=key,
            cells=("value",),
            decode=rows.value,
            what=marked("A value"),
            put=_LOST,
            drive=f"(SELECT drive FROM series WHERE series.number = {table}.series)",  # noqa: S608  # our own tables
            suspects="typeof(value) IN ('blob', 'real')",
        )
        for table, key in (
            ("latest", ("series",)),
            ("fresh", ("at", "series", "nth")),
            ("value", ("series", "at", "nth")),
        )
    ),
    *(
        Check(table=table, key=key, cells=("packed",), decode=decode, what=what)
        for table, key, decode, what in (
            ("kept_state", ("drive", "at"), packing.unpacked, marked("A dated copy of its state")),
            ("last_reading", ("drive",), packing.reading, marked("Its last reading")),
            ("beside", ("drive", "at", "nth"), packing.beside, marked("What stood beside a reading")),
            ("answer", ("drive",), packing.unpacked, marked("What smartctl last printed of it")),
            ("probe", ("drive", "at"), packing.unpacked, marked("A probe")),
        )
    ),
    Check(
        table="io_day",
        key=("drive", "day", "load_class", "direction"),
        cells=("histogram",),
        decode=packing.histogram,
        what=marked("The times of a day"),
        suspects="length(histogram) % 4 <> 0",
    ),
    Check(
        table="day_book",
        key=("number",),
        cells=("data",),
        decode=_object,
        what=marked("What stands behind a line of the day book"),
        put="data = '{}'",
        suspects="NOT json_valid(data) OR json_type(data) <> 'object'",
    ),
)
"""What is looked at besides in a thorough look."""
