"""The third step: passes of one second are told apart, and a file tells whose it is."""

from diskwatch.history.versions import APPLICATION_ID

STATEMENTS = (
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
