"""A connection with transactions: what the writer needs of the library that makes the schema.

The library takes as much memory as all of the watch's own code. A history that has every step needs it no more,
so the watch goes on with this, which does the same.
"""

import sqlite3
from collections.abc import Iterator
from contextlib import AbstractContextManager, contextmanager
from typing import Protocol


class Holding(Protocol):
    """What the writer asks of a connection; the library's ``Database`` has it too."""

    conn: sqlite3.Connection

    def atomic(self) -> AbstractContextManager[object]:
        """A transaction: all that is done within it, or nothing."""

    def rollback(self) -> None:
        """Undo what a failure left open; nothing where nothing is open."""

    def close(self) -> None:
        """Let go of the connection."""


class Plain:
    """A connection to a history that has all its steps."""

    def __init__(self, connection: sqlite3.Connection) -> None:
        self.conn = connection

    @contextmanager
    def atomic(self) -> Iterator[None]:
        """A transaction: all that is done within it, or nothing. None may lie within another."""
        self.conn.execute("BEGIN")
        try:
            yield
            self.conn.execute("COMMIT")
        except BaseException:
            self.rollback()
            raise

    def rollback(self) -> None:
        """Undo what a failure left open; nothing where nothing is open."""
        if self.conn.in_transaction:
            self.conn.rollback()

    def close(self) -> None:
        """Let go of the connection."""
        self.conn.close()
