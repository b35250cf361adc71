"""The step of trends: what latency was learnt from, and every forecast with what became of it.

What latency was learnt from is large and moves once a day; every pass rewrites the analyser's state, so it
stands apart from that. ``reached`` is the day on which the signal came to the limit.
"""

STATEMENTS = (
    """
    CREATE TABLE latency_state (
        drive INTEGER PRIMARY KEY REFERENCES drive,
        through INTEGER NOT NULL,
        packed BLOB NOT NULL
    ) STRICT
    """,
    """
    CREATE TABLE forecast (
        drive INTEGER NOT NULL REFERENCES drive,
        signal TEXT NOT NULL,
        made_on_day INTEGER NOT NULL,
        at_limit REAL NOT NULL,
        limit_from TEXT NOT NULL,
        low REAL,
        high REAL,
        probability REAL NOT NULL,
        reason TEXT,
        reached INTEGER,
        PRIMARY KEY (drive, signal, made_on_day)
    ) STRICT, WITHOUT ROWID
    """,
)
