"""The owner's word about a drive, kept: what is told of it, and what has been seen to.

Each deed takes a history that may be written and the words of a request, which are looked through anew: whoever
leaves a request may have looked less closely.
"""

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from diskwatch import analyser
from diskwatch.errors import HistoryError, UsageError
from diskwatch.history.arriving import Described
from diskwatch.history.moments import Dated
from diskwatch.history.moving import Case, Judged, Part
from diskwatch.history.writer import History
from diskwatch.judge import sentences
from diskwatch.language import _, marked
from diskwatch.records import DriveLine, DriveRound, Entry, KnownDrive, Outcome, Pass, Settled
from diskwatch.records.owner import (
    ASSET,
    BACKED_UP,
    LABEL,
    LONGEST_REASON,
    REPLACED_BY,
    WARRANTY,
    checked_fact,
    checked_text,
)
from diskwatch.service.requests import Answer
from diskwatch.units import plain

TELL, SETTLE = "tell", "settle"

_FACTS: Mapping[str, str] = {
    LABEL: marked("label"),
    ASSET: marked("asset"),
    WARRANTY: marked("warranty until"),
    BACKED_UP: marked("backed up"),
}


def tell(history: History, words: Mapping[str, Any], at: int) -> Answer:
    """Keep facts of a drive.

    Args:
        history: where.
        words: ``drive``, its number, and ``facts``, values by name (`diskwatch.records.owner.TOLD`).
        at: now, UTC seconds since 1970.

    Raises:
        UsageError: a fact cannot be right.
        HistoryError: there is no such drive, or it could not be stored.
    """
    known = _drive(history, words["drive"])
    facts = {name: checked_fact(name, str(value), at) for name, value in dict(words["facts"]).items()}
    said = [_told(name, value) for name, value in facts.items()]
    entries = [
        Entry(
            at=at,
            drive=known.number,
            kind="owner",
            text=text,
            data={"fact": name, "value": facts[name] or None},
        )
        for name, text in zip(facts, said, strict=True)
    ]
    history.tell(known.number, facts, at, *entries)
    return Answer(done=tuple(said))


def settle(history: History, words: Mapping[str, Any], at: int) -> Answer:
    """Keep that something has been seen to; the drive is judged anew from there.

    A drive whose place another one has taken is not judged anew: should it come back, its call stands.

    Args:
        history: where.
        words: ``drive``, its number; ``because``, what was done; ``replaced_by``, another's number, or None.
        at: now, UTC seconds since 1970.

    Raises:
        UsageError: the words cannot be right.
        HistoryError: there is no such drive, it was never judged, or it could not be stored.
    """
    known = _drive(history, words["drive"])
    because = checked_text("--because", str(words["because"]), LONGEST_REASON)
    if not because:
        raise UsageError("--because holds no words", hint="say what was done: it goes into the day book")
    if words["replaced_by"] is not None:
        return _replaced(history, known, _drive(history, words["replaced_by"]), because, at)
    kept = history.states().get(known.number)
    if kept is None:
        raise HistoryError(
            "the drive has never been judged, so there is nothing to settle", hint="see 'diskwatch bays'"
        )
    state = analyser.load(kept)
    before = state.call
    step = analyser.settle(state, Settled(at=at, because=because))
    entries = [replace(entry, drive=known.number) for entry in step.happened]
    history.arrive((_nothing_new(known),), lambda case: _judged(case, step), *entries)
    stands = "" if step.call is None or before is None else _stands(before.word, step.call.word)
    return Answer(done=(*(entry.text for entry in entries[:1]), *((stands,) if stands else ())))


DEEDS: Mapping[str, Callable[[History, Mapping[str, Any], int], Answer]] = {TELL: tell, SETTLE: settle}
"""What an owner may ask for, by the name of the request."""


def _drive(history: History, number: object) -> KnownDrive:
    found = next((one for one in history.known() if one.number == number), None)
    if found is None:
        raise HistoryError("the history knows no such drive any more", hint="see 'diskwatch bays'")
    return found


def _told(name: str, value: str) -> str:
    what = _(_FACTS[name])
    if not value:
        return _("Taken back by the owner: {what}.").format(what=what)
    return _("Told by the owner: {what} {value}.").format(what=what, value=value)


def _replaced(history: History, old: KnownDrive, new: KnownDrive, because: str, at: int) -> Answer:
    if old.number == new.number:
        raise UsageError("a drive cannot be replaced by itself", hint="name the new one behind --replaced-by")
    _refuse_circle(history, old, new)
    text = sentences.settled(Settled(at=at, because=because, replaced_by=_name(new)))
    data = {"because": because, "replaced_by": _name(new)}
    took = _("It took the place of {drive}, by the owner's word: {because}.").format(
        drive=_name(old), because=because
    )
    history.tell(
        old.number,
        {REPLACED_BY: _name(new)},
        at,
        Entry(at=at, drive=old.number, kind="settled", text=text, data=data),
        Entry(
            at=at, drive=new.number, kind="owner", text=took, data={"because": because, "replaced": _name(old)}
        ),
    )
    gone = _(
        "It is left out of the bays from now on; should it be met again, it comes back with the call it had."
    )
    return Answer(done=(text, gone))


def _refuse_circle(history: History, old: KnownDrive, new: KnownDrive) -> None:
    """Drives that took each other's places would all be left out of the bays, with none left in them."""
    gone = {_name(line): line.owner.replaced_by for line in history.lines() if line.departed}
    met, after = {_name(old)}, _name(new)
    while after not in met:
        met.add(after)
        following = gone.get(after)
        if following is None:
            return
        after = following
    raise UsageError(
        f"{plain(_name(old))} cannot be replaced by {plain(_name(new))}, whose own place it has taken",
        hint="name the drive that is in use now behind --replaced-by",
    )


def _name(known: KnownDrive | DriveLine) -> str:
    who = known.drive.identity
    return who.telling_serial or who.wwn or known.place.device


def _nothing_new(known: KnownDrive) -> Part:
    there = Described(drive=known.drive, place=known.place, first_seen=known.first_seen)
    return Part(known=known, described=there, lines=())


def _judged(case: Case, step: analyser.Step) -> Judged:
    """The state as settled takes the place of the one at the last pass, also as the dated copy of it."""
    last = step.state.last_at or 0
    kept = analyser.dump(step.state)
    part = DriveRound(
        known=case.known,
        pass_=Pass(at=last, outcome=step.state.outcome or Outcome.READ),
        state=kept,
        findings=step.findings,
        evidence=step.evidence,
        call=step.call,
    )
    turn = max((one.turn for one in case.copies), default=0)
    return Judged(part=part, since=None, copies=(Dated(turn=turn, at=last, state=kept),))


def _stands(before: str, now: str) -> str:
    if before == now:
        return _("Its call stays {now}.").format(now=now)
    return _("Its call was {before} and is now {now}.").format(before=before, now=now)
