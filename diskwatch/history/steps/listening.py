"""What is heard of drives besides their own word: how far the kernel's log was read, and the counts so far."""

STATEMENTS = (
    # It belongs to the machine and to no drive: it travels with none.
    """
    CREATE TABLE left_off (
        source TEXT PRIMARY KEY,
        log TEXT NOT NULL,
        sequence INTEGER NOT NULL,
        gathered TEXT NOT NULL
    ) STRICT, WITHOUT ROWID
    """,
    """
    CREATE TABLE heard (
        drive INTEGER NOT NULL REFERENCES drive,
        signal TEXT NOT NULL,
        total INTEGER NOT NULL,
        PRIMARY KEY (drive, signal)
    ) STRICT, WITHOUT ROWID
    """,
)
