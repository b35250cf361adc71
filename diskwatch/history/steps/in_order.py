"""The fourth step: what was read keeps the order in which it was read, whatever the clock did.

``nth`` tells passes of one second apart, and stands now with all that such a pass brought. ``turn`` counts how
often the clock had been set back under a drive: by turn, time and nth its passes stand as they were made.
"""

STATEMENTS = (
    """
    CREATE TABLE every_value (
        series INTEGER NOT NULL REFERENCES series,
        at INTEGER NOT NULL,
        nth INTEGER NOT NULL DEFAULT 0,
        value ANY,
        reason TEXT,
        turn INTEGER NOT NULL DEFAULT 0,
        PRIMARY KEY (series, at, nth)
    ) STRICT, WITHOUT ROWID
    """,
    "INSERT INTO every_value (series, at, value, reason) SELECT series, at, value, reason FROM value",
    "DROP TABLE value",
    "ALTER TABLE every_value RENAME TO value",
    """
    CREATE TABLE every_fresh (
        at INTEGER NOT NULL,
        series INTEGER NOT NULL REFERENCES series,
        nth INTEGER NOT NULL DEFAULT 0,
        value ANY,
        reason TEXT,
        turn INTEGER NOT NULL DEFAULT 0,
        PRIMARY KEY (at, series, nth)
    ) STRICT, WITHOUT ROWID
    """,
    "INSERT INTO every_fresh (at, series, value, reason) SELECT at, series, value, reason FROM fresh",
    "DROP TABLE fresh",
    "ALTER TABLE every_fresh RENAME TO fresh",
    """
    CREATE TABLE every_beside (
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        nth INTEGER NOT NULL DEFAULT 0,
        packed BLOB NOT NULL,
        turn INTEGER NOT NULL DEFAULT 0,
        PRIMARY KEY (drive, at, nth)
    ) STRICT, WITHOUT ROWID
    """,
    "INSERT INTO every_beside (drive, at, packed) SELECT drive, at, packed FROM beside",
    "DROP TABLE beside",
    "ALTER TABLE every_beside RENAME TO beside",
    "ALTER TABLE drive ADD COLUMN turn INTEGER NOT NULL DEFAULT 0",
    "ALTER TABLE pass ADD COLUMN turn INTEGER NOT NULL DEFAULT 0",
    "ALTER TABLE analyser_state ADD COLUMN turn INTEGER NOT NULL DEFAULT 0",
    "ALTER TABLE kept_state ADD COLUMN turn INTEGER NOT NULL DEFAULT 0",
)
