"""What is found between two passes, in traffic and by probes: drifts that begin to stand, and the call."""

from collections.abc import Iterable
from dataclasses import replace

from diskwatch.analyser.advance import quiet, told_call
from diskwatch.analyser.state import DriveState
from diskwatch.judge import rules
from diskwatch.records import Entry, Finding


def drifted(state: DriveState, found: Iterable[Finding], *, at: int) -> tuple[DriveState, tuple[Entry, ...]]:
    """Let drifts stand.

    Args:
        state: the drive's state without them.
        found: the drifts that show now; those that stand already keep the time since which they do.
        at: now, UTC seconds since 1970.

    Returns:
        The state with them, and what the day book should hold; without the drive's number.
    """
    happened: list[Entry] = []
    standing = dict(state.standing)
    for one in found:
        before = standing.get(one.name)
        standing[one.name] = one if before is None else replace(one, since=before.since)
        if before is None:
            data = {"evidence": one.evidence, **one.data}
            happened.append(Entry(at=at, drive=None, kind="drift", text=one.sentence, data=data))
    after = replace(state, standing=standing)
    if standing.keys() != state.standing.keys():
        # The next reading brings the signs that name a cause; a drive that gives none is called all the same.
        call = rules.decide(standing.values(), before=state.call, at=at, quiet=quiet(after, at))
        if state.call is None or call.word is not state.call.word:
            happened += told_call(state.call, call)
        after = replace(after, call=call)
    return after, tuple(happened)
