"""The step of probes: what each of them brought, read by read, so that its ledgers can be worked out again."""

STATEMENTS = (
    """
    CREATE TABLE probe (
        drive INTEGER NOT NULL REFERENCES drive,
        at INTEGER NOT NULL,
        place INTEGER NOT NULL,
        disk_ms INTEGER NOT NULL,
        packed BLOB NOT NULL,
        PRIMARY KEY (drive, at)
    ) STRICT, WITHOUT ROWID
    """,
)
