"""How a history of an older version is read before the watch has brought it up to date.

Nothing of the file is changed or copied. What a later step of the schema would have made of it stands in views
of the reading connection alone, which SQLite keeps in memory and finds before the file's own tables of the same
name. So every question is asked in one way, whatever the file's age and size.
"""

import sqlite3

from diskwatch.history import versions


def _nothing(name: str, columns: str) -> str:
    nulls = ", ".join(f"NULL AS {column}" for column in columns.split())
    return f"CREATE TEMP VIEW {name} AS SELECT {nulls} WHERE 0"


def _with(name: str, columns: str) -> str:
    # Where the file lacks an older step too, the view for that one has these columns already.
    return f"CREATE TEMP VIEW IF NOT EXISTS {name} AS SELECT *, {columns} FROM main.{name}"  # noqa: S608  # our own


# As the step itself makes it of the minutes.
_FIVES = """
    CREATE TEMP VIEW io_five AS
    SELECT at / 300 * 65536 + drive AS slot, at / 300 * 300 AS at, drive, sum(span_ms) AS covered_ms,
        sum(reads) AS reads, sum(writes) AS writes,
        sum(read_bytes) AS read_bytes, sum(write_bytes) AS write_bytes,
        sum(read_ms) AS read_ms, sum(write_ms) AS write_ms, sum(busy_ms) AS busy_ms,
        NULL AS longest_read_us, NULL AS longest_write_us, count(*) AS spans, 0 AS reset
    FROM io_minute GROUP BY io_minute.at / 300, drive
"""

_PASSES = """
    CREATE TEMP VIEW pass AS
    SELECT drive, at, 0 AS nth, outcome, exit_bits, took_ms, explanation, 0 AS turn FROM main.pass
"""

_VIEWS = {
    "0002_ten_years": (
        _FIVES,
        _nothing("io_day", "drive day load_class direction rollups operations histogram"),
        _nothing("pass_day", "drive day outcome passes first last"),
        _nothing("kept_state", "number drive at packed turn"),
        _nothing("beside", "drive at nth packed turn"),
        _nothing("thinned", "what number before"),
    ),
    "0003_every_pass": (_PASSES,),
    "0004_in_order": (
        _with("value", "0 AS nth, 0 AS turn"),
        _with("fresh", "0 AS nth, 0 AS turn"),
        _with("beside", "0 AS nth, 0 AS turn"),
        *(_with(name, "0 AS turn") for name in ("drive", "pass", "analyser_state", "kept_state")),
    ),
    "0005_ways": (_nothing("way", "adapter instance type at"),),
    "0006_answer": (_nothing("answer", "drive at call packed"),),
    "0007_listening": (
        _nothing("left_off", "source log sequence gathered"),
        _nothing("heard", "drive signal total"),
    ),
    "0008_trends": (
        _nothing("latency_state", "drive through packed"),
        _nothing(
            "forecast", "drive signal made_on_day at_limit limit_from low high probability reason reached"
        ),
    ),
    "0009_probe": (_nothing("probe", "drive at place disk_ms packed"),),
}
"""What stands in for a step that a file may lack; one without a line here must be taken before it is read."""


def read_as_current(connection: sqlite3.Connection) -> bool:
    """Let a connection answer as if the file were of this version.

    Args:
        connection: a connection to it that only reads.

    Returns:
        Whether it does; False where the file lacks a step that no view can stand in for.

    Raises:
        sqlite3.Error: it cannot be read.
    """
    taken = versions.steps_of(connection)
    lacking = [name for name in versions.MIGRATIONS if name not in taken]
    if not _VIEWS.keys() >= set(lacking):
        return False
    connection.execute("PRAGMA temp_store = MEMORY")
    for name in lacking:
        for statement in _VIEWS[name]:
            connection.execute(statement)
    return True
