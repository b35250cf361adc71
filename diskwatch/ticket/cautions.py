"""What whoever reads a ticket must not take it for."""

from collections.abc import Iterator

from diskwatch.language import _, marked
from diskwatch.records import CallWord, DriveLine, Kind

_TOMORROW = marked(
    "This says what was seen. A drive of which nothing is told here may still fail on the next day."
)
_EVIDENCE = marked(
    "Evidence is given in days of watching: a drive within its norm would show this at most once in so many. "
    "It is no probability that the drive fails, and none that it does not."
)
_BOUND = marked(
    "The bound on false alarms rests on the episode assumption; where errors come in runs of weeks it does not "
    "hold. For counters it is proved at twice the thresholds in use and computed at these."
)
_WORDS = marked("Names, versions and texts of the drive stand here as it gave them.")
_HARD_DRIVE = marked(
    "About a quarter of failed hard drives, and about half of the 2.5-inch ones, had moved no counter by their "
    "last day (open daily drive data of a data centre, 2013)."
)
_KEEP = marked("The call keep is no promise: it says that nothing asks for a deed yet.")
_WEAK = marked(
    "This drive gives neither a usable serial nor a world-wide name: its past may be mixed with another's."
)


def cautions(line: DriveLine) -> Iterator[str]:
    """The cautions that hold for a drive."""
    yield from map(_, (_TOMORROW, _EVIDENCE, _BOUND, _WORDS))
    if line.drive.kind in {Kind.HDD, Kind.SAS, Kind.USB}:
        yield _(_HARD_DRIVE)
    if line.call is not None and line.call.word is CallWord.KEEP:
        yield _(_KEEP)
    if line.drive.identity.weak:
        yield _(_WEAK)
