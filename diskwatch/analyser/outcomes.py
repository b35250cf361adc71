"""Passes that brought nothing, and what the day book hears of how passes end."""

from collections.abc import Iterator, Mapping
from dataclasses import replace

from diskwatch.analyser.state import DriveState
from diskwatch.judge import sentences
from diskwatch.records import CallWord, Cause, Entry, Finding, FindingKind, Kind, Outcome, Pass

UNREAD_LIMIT = 3
"""Passes without a reading after which a drive wants a hand; sleep in between neither counts nor ends it."""

_SHOULD_HAVE_READ = frozenset({Outcome.TIMED_OUT, Outcome.GARBLED, Outcome.ABSENT})
_MACHINE_WIDE = frozenset({Outcome.NO_TOOL})
_USUAL = frozenset({Outcome.READ, Outcome.ASLEEP})
_UNREADABLE = "fact:unreadable"


def entry(pass_: Pass, kind: str, text: str, **data: object) -> Entry:
    """A day-book entry about a pass; the drive's number is not known here."""
    return Entry(at=pass_.at, drive=None, kind=kind, text=text, data=data)


def told(state: DriveState, pass_: Pass) -> Iterator[Entry]:
    """Say how a pass ended where that is new; falling asleep and waking up is normal life and said once."""
    outcome = pass_.outcome
    if outcome is state.outcome or outcome in _MACHINE_WIDE:
        return
    if outcome is Outcome.READ and (state.outcome is None or state.outcome in _USUAL):
        return
    if outcome is Outcome.ASLEEP and state.slept:
        return
    text = "It answers again." if outcome is Outcome.READ else (pass_.explanation or outcome.value)
    yield entry(pass_, "pass", text, outcome=outcome.value)


def without_reading(state: DriveState, pass_: Pass) -> DriveState:
    """A pass that brought nothing: it moves no ledger, but three in a row want a hand."""
    missed = _missed(state, pass_)
    unread = state.unread + 1 if missed else state.unread
    standing = state.standing
    if missed and unread >= UNREAD_LIMIT:
        standing = {**standing, _UNREADABLE: _unreadable(standing, pass_, unread)}
    return replace(
        state,
        last_at=pass_.at,
        outcome=pass_.outcome,
        slept=state.slept or pass_.outcome is Outcome.ASLEEP,
        unread=unread,
        standing=standing,
    )


def _missed(state: DriveState, pass_: Pass) -> bool:
    """Whether the pass should have brought a reading and did not.

    A drive that has given readings before cannot lack SMART: a dying one answers none of the questions by which
    it is told what it is. A USB drive is away because people unplug such drives, a replaced one because
    it was taken out.
    """
    kind = None if pass_.drive is None else pass_.drive.kind
    if pass_.outcome is Outcome.NO_SMART:
        return state.first_at is not None and kind is not Kind.VIRTUAL
    replaced = state.word is not None and state.word.replaced_by is not None
    if pass_.outcome is Outcome.ABSENT and (kind is Kind.USB or replaced):
        return False
    return pass_.outcome in _SHOULD_HAVE_READ


def _unreadable(standing: Mapping[str, Finding], pass_: Pass, times: int) -> Finding:
    known = standing.get(_UNREADABLE)
    return Finding(
        name=_UNREADABLE,
        kind=FindingKind.FACT,
        signals=(),
        since=pass_.at if known is None else known.since,
        calls=CallWord.LOOK,
        cause=Cause.UNCLEAR,
        evidence=None,
        sentence=sentences.unreadable(times, pass_.explanation or pass_.outcome.value),
        data={"times": times, "outcome": pass_.outcome.value},
    )
