"""A drive that goes away and comes back, again and again: one return is no proof that it will stay."""

from collections.abc import Iterator
from itertools import pairwise

from diskwatch.analyser.state import DriveState
from diskwatch.judge import sentences
from diskwatch.judge.neighbours import WINDOW, Trouble
from diskwatch.records import CallWord, Cause, Finding, FindingKind, Pass
from diskwatch.units import day_number

NAME = "fact:comes-and-goes"

OFTEN = 2
"""Absences within the window that make a drive one that comes and goes (a proposal; no source)."""


def comes_and_goes(state: DriveState, pass_: Pass) -> Iterator[Finding]:
    """It was gone more than once, and the last time is not long ago.

    Days in a row are one absence. Once it stands, one recent absence is enough to let it stand on: it ends when
    the whole window has passed without another.

    Args:
        state: the drive with its days of trouble, after a reading.
        pass_: the pass that brought it.
    """
    gone = state.troubles.get(Trouble.GONE.value)
    if not gone:
        return
    day = day_number(pass_.at)
    recent = [one for one in gone if 0 <= day - one < WINDOW]
    times = sum(later - earlier > 1 for earlier, later in pairwise(recent)) + bool(recent)
    if times == 0 or (times < OFTEN and NAME not in state.standing):
        return
    yield Finding(
        name=NAME,
        kind=FindingKind.FACT,
        signals=(),
        since=pass_.at,
        calls=CallWord.LOOK,
        cause=Cause.UNCLEAR,
        evidence=None,
        sentence=sentences.comes_and_goes(times, day - recent[-1], WINDOW),
        data={"times": times, "last_day": recent[-1]},
    )
