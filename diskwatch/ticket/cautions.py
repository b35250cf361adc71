"""What whoever reads a ticket must not take it for."""

from collections.abc import Iterator

from diskwatch.records import CallWord, DriveLine, Kind

_TOMORROW = "This says what was seen. A drive of which nothing is told here may still fail on the next day."
_EVIDENCE = (
    "Evidence is given in days of watching: a drive within its norm would show this at most once in so many. "
    "It is no probability that the drive fails, and none that it does not."
)
_BOUND = (
    "The bound on false alarms rests on the episode assumption; where errors come in runs of weeks it does not "
    "hold. For counters it is proved at twice the thresholds in use and computed at these."
)
_WORDS = "Names, versions and texts of the drive stand here as it gave them."
_HARD_DRIVE = (
    "About a quarter of failed hard drives, and about half of the 2.5-inch ones, had moved no counter by their "
    "last day (open daily drive data of a data centre, 2013)."
)
_KEEP = "The call keep is no promise: it says that nothing asks for a deed yet."
_WEAK = "This drive gives neither a usable serial nor a world-wide name: its past may be mixed with another's."


def cautions(line: DriveLine) -> Iterator[str]:
    """The cautions that hold for a drive."""
    yield from (_TOMORROW, _EVIDENCE, _BOUND, _WORDS)
    if line.drive.kind in {Kind.HDD, Kind.SAS, Kind.USB}:
        yield _HARD_DRIVE
    if line.call is not None and line.call.word is CallWord.KEEP:
        yield _KEEP
    if line.drive.identity.weak:
        yield _WEAK
