"""The tables of the history, as numbered steps that only ever go forward.

What shaped them: ten years of six drives must stay small, few bytes may be written a day, and every question
must be answered quickly.

* A page of 4 KiB is the least that SQLite writes, so what a round writes lies close together: values of today
  stand in ``fresh`` in order of time, and the first round of a new day files them into ``value`` in order of
  series, where a long range of one series reads at once. Evidence goes the same way, from ``latest`` into
  ``evidence``.
* Values are stored on change and every pass is stored, so "no change" is knowledge.
* What is thinned, and when, stands in one table: `diskwatch.history.keeping`.
* ``latest`` holds what every signal is now; no question about now walks through the past.
* Explanations of passes repeat for months: each stands once in ``sentence``.
* Whole numbers of up to 63 bits are INTEGER. NVMe counters have 128 bits; what is larger is kept as its decimal
  digits in a BLOB, which tells it from a word by its type alone. Names that UTF-8 cannot carry are kept as
  bytes likewise. Hence the columns of type ANY.
* Times are UTC seconds since 1970, days count from 1970-01-01.
"""

from diskwatch.history.library import Database, Migrations
from diskwatch.history.versions import APPLICATION_ID, MIGRATION_SET, MIGRATIONS

steps = Migrations(MIGRATION_SET)

_BASE = (
    """
    CREATE TABLE sentence (
        number INTEGER PRIMARY KEY,
        text TEXT NOT NULL UNIQUE
    ) STRICT
    """,
    # AUTOINCREMENT: the number of a drive that was taken out must never come to mean another one.
    """
    CREATE TABLE drive (
        number INTEGER PRIMARY KEY AUTOINCREMENT,
        wwn ANY,
        model ANY,
        serial ANY,
        path ANY NOT NULL,
        kind TEXT NOT NULL,
        firmware TEXT,
        capacity_bytes ANY,
        rotation_rpm ANY,
        device TEXT NOT NULL,
        bay TEXT,
        lives_here TEXT NOT NULL,
        first_seen INTEGER NOT NULL,
        passed_at INTEGER,
        outcome TEXT,
        explanation INTEGER REFERENCES sentence
    ) STRICT
    """,
    """
    CREATE TABLE owner_fact (
        drive INTEGER NOT NULL REFERENCES drive,
        fact TEXT NOT NULL,
        value TEXT NOT NULL,
        at INTEGER NOT NULL,
        PRIMARY KEY (drive, fact)
    ) STRICT, WITHOUT ROWID
    """,
    """
    CREATE TABLE plugged (
        drive INTEGER NOT NULL REFERENCES drive,
        since INTEGER NOT NULL,
        device TEXT NOT NULL,
        bay TEXT,
        PRIMARY KEY (drive, since)
    ) STRICT, WITHOUT ROWID
    """,
    """
    CREATE TABLE pass (
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        outcome TEXT NOT NULL,
        exit_bits INTEGER,
        took_ms INTEGER NOT NULL,
        explanation INTEGER REFERENCES sentence,
        PRIMARY KEY (drive, at)
    ) STRICT, WITHOUT ROWID
    """,
    # A signal whose unit changes (its packing became known) starts a new series; the old one is not current.
    """
    CREATE TABLE series (
        number INTEGER PRIMARY KEY,
        drive INTEGER NOT NULL REFERENCES drive,
        signal TEXT NOT NULL,
        unit TEXT,
        kind TEXT,
        source TEXT,
        current INTEGER NOT NULL DEFAULT 1
    ) STRICT
    """,
    "CREATE UNIQUE INDEX series_current ON series (drive, signal) WHERE current",
    """
    CREATE TABLE latest (
        series INTEGER PRIMARY KEY REFERENCES series,
        since INTEGER,
        value ANY,
        reason TEXT,
        day INTEGER,
        evidence REAL
    ) STRICT
    """,
    """
    CREATE TABLE fresh (
        at INTEGER NOT NULL,
        series INTEGER NOT NULL REFERENCES series,
        value ANY,
        reason TEXT,
        PRIMARY KEY (at, series)
    ) STRICT, WITHOUT ROWID
    """,
    """
    CREATE TABLE value (
        series INTEGER NOT NULL REFERENCES series,
        at INTEGER NOT NULL,
        value ANY,
        reason TEXT,
        PRIMARY KEY (series, at)
    ) STRICT, WITHOUT ROWID
    """,
    """
    CREATE TABLE evidence (
        series INTEGER NOT NULL REFERENCES series,
        day INTEGER NOT NULL,
        evidence REAL NOT NULL,
        PRIMARY KEY (series, day)
    ) STRICT, WITHOUT ROWID
    """,
    # The key (at, drive) as one number: a table whose key only grows is written a third less than an index is.
    # The slot is the minute since 1970 times 65,536 plus the drive.
    """
    CREATE TABLE io_minute (
        slot INTEGER PRIMARY KEY,
        at INTEGER GENERATED ALWAYS AS (slot / 65536 * 60) VIRTUAL,
        drive INTEGER GENERATED ALWAYS AS (slot % 65536) VIRTUAL REFERENCES drive,
        span_ms INTEGER NOT NULL,
        reads INTEGER NOT NULL,
        writes INTEGER NOT NULL,
        read_bytes INTEGER NOT NULL,
        write_bytes INTEGER NOT NULL,
        read_ms INTEGER NOT NULL,
        write_ms INTEGER NOT NULL,
        busy_ms INTEGER NOT NULL
    ) STRICT
    """,
    """
    CREATE TABLE day_book (
        number INTEGER PRIMARY KEY,
        at INTEGER NOT NULL,
        drive INTEGER REFERENCES drive,
        kind TEXT NOT NULL,
        text TEXT NOT NULL,
        data TEXT NOT NULL
    ) STRICT
    """,
    "CREATE INDEX day_book_at ON day_book (at)",
    "CREATE INDEX day_book_drive ON day_book (drive, at)",
    """
    CREATE TABLE finding (
        number INTEGER PRIMARY KEY,
        drive INTEGER NOT NULL REFERENCES drive,
        name TEXT NOT NULL,
        kind TEXT NOT NULL,
        signals TEXT NOT NULL,
        since INTEGER NOT NULL,
        calls TEXT,
        cause TEXT,
        evidence REAL,
        sentence TEXT NOT NULL,
        data TEXT NOT NULL,
        closed INTEGER
    ) STRICT
    """,
    "CREATE UNIQUE INDEX finding_standing ON finding (drive, name) WHERE closed IS NULL",
    # Calls are in order of a number, not of time: a clock that was set back must not bring an old call back.
    """
    CREATE TABLE call (
        number INTEGER PRIMARY KEY,
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        word TEXT NOT NULL,
        cause TEXT,
        cause_probability REAL,
        cause_second TEXT,
        reason TEXT NOT NULL,
        rule TEXT NOT NULL,
        evidence REAL
    ) STRICT
    """,
    "CREATE INDEX call_drive ON call (drive)",
    # Both are rewritten at nearly every pass: packed, they cost a third of the bytes.
    """
    CREATE TABLE analyser_state (
        drive INTEGER PRIMARY KEY REFERENCES drive,
        at INTEGER NOT NULL,
        packed BLOB NOT NULL
    ) STRICT
    """,
    """
    CREATE TABLE last_reading (
        drive INTEGER PRIMARY KEY REFERENCES drive,
        at INTEGER NOT NULL,
        packed BLOB NOT NULL
    ) STRICT
    """,
)


@steps(name=MIGRATIONS[0])
def _base(db: Database) -> None:
    for statement in _BASE:
        db.conn.execute(statement)
    db.conn.execute("PRAGMA user_version = 1")


_TEN_YEARS = (
    # As io_minute: the five minutes since 1970 times 65,536 plus the drive.
    """
    CREATE TABLE io_five (
        slot INTEGER PRIMARY KEY,
        at INTEGER GENERATED ALWAYS AS (slot / 65536 * 300) VIRTUAL,
        drive INTEGER GENERATED ALWAYS AS (slot % 65536) VIRTUAL REFERENCES drive,
        covered_ms INTEGER NOT NULL,
        reads INTEGER NOT NULL,
        writes INTEGER NOT NULL,
        read_bytes INTEGER NOT NULL,
        write_bytes INTEGER NOT NULL,
        read_ms INTEGER NOT NULL,
        write_ms INTEGER NOT NULL,
        busy_ms INTEGER NOT NULL,
        longest_read_us INTEGER,
        longest_write_us INTEGER,
        spans INTEGER NOT NULL,
        reset INTEGER NOT NULL
    ) STRICT
    """,
    # What was kept by the minute until now; how long the longest short span was is not known of it.
    """
    INSERT INTO io_five (slot, covered_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms,
        longest_read_us, longest_write_us, spans, reset)
    SELECT at / 300 * 65536 + drive, sum(span_ms), sum(reads), sum(writes), sum(read_bytes), sum(write_bytes),
        sum(read_ms), sum(write_ms), sum(busy_ms), NULL, NULL, count(*), 0
    FROM io_minute GROUP BY 1
    """,
    """
    CREATE TABLE io_day (
        drive INTEGER NOT NULL REFERENCES drive,
        day INTEGER NOT NULL,
        load_class INTEGER NOT NULL,
        direction INTEGER NOT NULL,
        rollups INTEGER NOT NULL,
        operations INTEGER NOT NULL,
        histogram BLOB NOT NULL,
        PRIMARY KEY (drive, day, load_class, direction)
    ) STRICT, WITHOUT ROWID
    """,
    # Of passes that are thinned: how many of a day ended how, so that exposure stays exact.
    """
    CREATE TABLE pass_day (
        drive INTEGER NOT NULL REFERENCES drive,
        day INTEGER NOT NULL,
        outcome TEXT NOT NULL,
        passes INTEGER NOT NULL,
        first INTEGER NOT NULL,
        last INTEGER NOT NULL,
        PRIMARY KEY (drive, day, outcome)
    ) STRICT, WITHOUT ROWID
    """,
    # A rowid table: packed states are long, and long rows lie badly in an index.
    """
    CREATE TABLE kept_state (
        number INTEGER PRIMARY KEY,
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        packed BLOB NOT NULL,
        UNIQUE (drive, at)
    ) STRICT
    """,
    # What a judgement rests on beside the values of a reading, on change.
    """
    CREATE TABLE beside (
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        packed BLOB NOT NULL,
        PRIMARY KEY (drive, at)
    ) STRICT, WITHOUT ROWID
    """,
    # How far upkeep has come: everything before this time is thin already, or condensed, or was looked through.
    """
    CREATE TABLE thinned (
        what TEXT NOT NULL,
        number INTEGER NOT NULL,
        before INTEGER NOT NULL,
        PRIMARY KEY (what, number)
    ) STRICT, WITHOUT ROWID
    """,
)


@steps(name=MIGRATIONS[1])
def _ten_years(db: Database) -> None:
    for statement in _TEN_YEARS:
        db.conn.execute(statement)
    db.conn.execute("PRAGMA user_version = 2")


_EVERY_PASS = (
    # Two passes may fall into one second, also where the clock was set back: nth tells them apart.
    """
    CREATE TABLE every_pass (
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        nth INTEGER NOT NULL DEFAULT 0,
        outcome TEXT NOT NULL,
        exit_bits INTEGER,
        took_ms INTEGER NOT NULL,
        explanation INTEGER REFERENCES sentence,
        PRIMARY KEY (drive, at, nth)
    ) STRICT, WITHOUT ROWID
    """,
    """
    INSERT INTO every_pass (drive, at, outcome, exit_bits, took_ms, explanation)
    SELECT drive, at, outcome, exit_bits, took_ms, explanation FROM pass
    """,
    "DROP TABLE pass",
    "ALTER TABLE every_pass RENAME TO pass",
    # By this the first bytes of a damaged file still tell whose it is.
    f"PRAGMA application_id = {APPLICATION_ID}",
)


@steps(name=MIGRATIONS[2])
def _every_pass(db: Database) -> None:
    for statement in _EVERY_PASS:
        db.conn.execute(statement)
    db.conn.execute("PRAGMA user_version = 3")


def bring_up_to_date(db: Database) -> None:
    """Apply the steps that a history lacks, all of them or none.

    Raises:
        sqlite3.Error: a step failed; the history is as it was.
    """
    with db.atomic():
        steps.apply(db)
