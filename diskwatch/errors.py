"""The errors that a person may meet, each with the exit code that it ends a command with.

    DiskwatchError            4
    |-- UsageError            2   the command line or a settings file asks for what cannot be
    |   |-- SettingsError     2   names file, key and what was expected
    |   `-- DriveUnknown      2   no drive, or more than one, is meant
    |-- NothingToWorkOn       3   there is no drive at all, or none was read yet
    `-- HistoryError          4   the history cannot be read or written
        |-- HistoryTooNew     4   it was written by a newer version; it is left untouched
        |-- HistoryDamaged    4   its file is damaged; what can be read of it can be carried over
        |-- HistoryGarbled    4   its file is sound, and a value in it cannot be right
        |-- HistoryGone       4   its file was taken away, or another one put in its place
        |-- HistoryUnfit      4   what was to be written does not fit what stands in it
        `-- HistoryHeld       4   another process is writing it

One line says what happened, to which thing; ``hint`` says what to do about it. A drive that cannot be read
is no error: it is a pass with an outcome (`diskwatch.records.Outcome`).
"""

from typing import ClassVar


class DiskwatchError(Exception):
    """The root: everything that this program raises on purpose."""

    exit_code: ClassVar[int] = 4

    def __init__(self, what: str, *, hint: str | None = None) -> None:
        super().__init__(what)
        self.what = what
        self.hint = hint

    def __str__(self) -> str:
        """One line: what happened and, where there is something to do, what."""
        return f"{self.what}; {self.hint}" if self.hint else self.what


class UsageError(DiskwatchError):
    """The command line asks for what cannot be."""

    exit_code: ClassVar[int] = 2


class SettingsError(UsageError):
    """A settings file has a wrong key or value."""


class DriveUnknown(UsageError):
    """A name fits no drive, or more than one."""


class NothingToWorkOn(DiskwatchError):
    """There is no drive at all, or none has been read yet."""

    exit_code: ClassVar[int] = 3


class HistoryError(DiskwatchError):
    """The history cannot be read or written."""


class HistoryTooNew(HistoryError):
    """The history was written by a newer version; it is left untouched."""


class HistoryDamaged(HistoryError):
    """The history's file is damaged; nothing of it was changed."""


class HistoryGarbled(HistoryError):
    """The history's file is sound, but it holds a value that cannot be right."""


class HistoryGone(HistoryError):
    """The history's file was moved, deleted or replaced while it was open for writing."""


class HistoryUnfit(HistoryError):
    """What was to be written does not fit what stands in the history; nothing of it was written."""


class HistoryHeld(HistoryError):
    """Another process is already writing this history."""
