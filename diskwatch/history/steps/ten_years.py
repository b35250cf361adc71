"""The second step: what lets a history of ten years stay small."""

STATEMENTS = (
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
