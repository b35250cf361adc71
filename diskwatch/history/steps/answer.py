"""The sixth step: what smartctl last printed of each drive, word for word, as proof for whoever repairs it."""

STATEMENTS = (
    # A rowid table: packed answers are long. The call is that of the time, so that a change of it is noticed.
    """
    CREATE TABLE answer (
        drive INTEGER PRIMARY KEY REFERENCES drive,
        at INTEGER NOT NULL,
        call TEXT,
        packed BLOB NOT NULL
    ) STRICT
    """,
)
