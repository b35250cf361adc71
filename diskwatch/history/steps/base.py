"""The first step: drives, passes, values, calls, and what they rest on."""

STATEMENTS = (
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
