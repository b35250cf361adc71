"""The fifth step: how drives behind USB adapters are reached, since finding out anew may wake them."""

STATEMENTS = (
    # It belongs to the machine and to no drive: it travels with none.
    """
    CREATE TABLE way (
        adapter TEXT PRIMARY KEY,
        instance TEXT NOT NULL,
        type TEXT,
        at INTEGER NOT NULL
    ) STRICT, WITHOUT ROWID
    """,
)
