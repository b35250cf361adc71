"""One pass over one drive taken in: the state machine itself."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from diskwatch.analyser.state import DriveState
from diskwatch.judge import facts, rules, sentences
from diskwatch.records import (
    Call,
    CallWord,
    Cause,
    Entry,
    Finding,
    FindingKind,
    Kind,
    Outcome,
    Pass,
    Reading,
)
from diskwatch.trends import episodes, increments, spots
from diskwatch.trends.norms import MAY_FALL, NORMS, STREAM_OF, Norm
from diskwatch.units import DAY, day_number

UNREAD_LIMIT = 3
"""Passes in a row without a reading after which a drive wants a hand."""

_SHOULD_HAVE_READ = frozenset({Outcome.TIMED_OUT, Outcome.GARBLED, Outcome.ABSENT})
_MACHINE_WIDE = frozenset({Outcome.NO_TOOL})

_DEFECTS = (
    "pending-sectors",
    "offline-uncorrectable",
    "reported-uncorrectable",
    "uncorrected-reads",
    "uncorrected-writes",
    "media-errors",
    "reallocated-sectors",
    "grown-defects",
)
"""Counters of which a first rise is a first defect, the most telling first."""

_ONLY_TURNING = frozenset({"reallocated-sectors"})
"""Of these a rise is ordinary on flash, where most drives retire a block in their first years."""

_CAUSES: Mapping[str, Cause] = {
    "media": Cause.MEDIA,
    "flash-media": Cause.MEDIA,
    "link": Cause.LINK,
    "timeouts": Cause.UNCLEAR,
    "power": Cause.POWER,
    "kernel-errors": Cause.UNCLEAR,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """What one pass led to.

    Attributes:
        state: the state after it.
        findings: everything that stands now, leading one first.
        evidence: M in days by signal, for signals that a ledger follows.
        call: what to do; None until the drive has been read.
        happened: what the day book should hold, in order; without the drive's number, which is not known here.
    """

    state: DriveState
    findings: tuple[Finding, ...]
    evidence: Mapping[str, float]
    call: Call | None
    happened: tuple[Entry, ...]


def advance(state: DriveState, pass_: Pass) -> Step:
    """Take in one pass.

    Args:
        state: the drive's state before it.
        pass_: how asking the drive went and what it brought.

    Returns:
        The new state and what follows from it. The same passes in the same order always give the same steps,
        however the state was saved and loaded between them.
    """
    happened = list(_told_outcome(state, pass_))
    now = replace(state, outcome=pass_.outcome, slept=state.slept or pass_.outcome is Outcome.ASLEEP)
    if pass_.outcome is Outcome.READ and pass_.reading is not None:
        now, more = _take_in(now, pass_, pass_.reading)
        happened += more
    else:
        now = _without_reading(now, pass_)
    now = replace(now, last_at=pass_.at)
    call = _called(now, pass_)
    if call is not None and (state.call is None or call.word is not state.call.word):
        happened += _told_call(state.call, call)
    now = replace(now, call=call)
    return Step(
        state=now,
        findings=rules.leading_first(now.standing.values()),
        evidence=_evidence(now),
        call=call,
        happened=tuple(happened),
    )


def _entry(pass_: Pass, kind: str, text: str, **data: object) -> Entry:
    return Entry(at=pass_.at, drive=None, kind=kind, text=text, data=data)


def _told_outcome(state: DriveState, pass_: Pass) -> Iterator[Entry]:
    """Say how a pass ended where that is new; falling asleep and waking up is normal life and said once."""
    outcome = pass_.outcome
    usual = {Outcome.READ, Outcome.ASLEEP}
    if outcome is state.outcome or outcome in _MACHINE_WIDE:
        return
    if outcome is Outcome.READ and (state.outcome is None or state.outcome in usual):
        return
    if outcome is Outcome.ASLEEP and state.slept:
        return
    text = "It answers again." if outcome is Outcome.READ else (pass_.explanation or outcome.value)
    yield _entry(pass_, "pass", text, outcome=outcome.value)


def _told_call(before: Call | None, call: Call) -> Iterator[Entry]:
    if before is None and call.word is CallWord.KEEP:
        return
    text = sentences.call_changed(before.word.value if before else None, call.word.value, call.reason)
    yield Entry(
        at=call.at,
        drive=None,
        kind="call",
        text=text,
        data={
            "call": call.word.value,
            "before": before.word.value if before else None,
            "cause": call.cause.value if call.cause else None,
            "rule": call.rule,
            "evidence": call.evidence,
        },
    )


def _without_reading(state: DriveState, pass_: Pass) -> DriveState:
    """A pass that brought nothing: it moves no ledger, but three in a row want a hand."""
    standing = dict(state.standing)
    missed = pass_.outcome in _SHOULD_HAVE_READ and not _unplugged(pass_)
    unread = state.unread + 1 if missed else state.unread
    if missed and unread >= UNREAD_LIMIT:
        name = "fact:unreadable"
        explanation = pass_.explanation or pass_.outcome.value
        standing[name] = Finding(
            name=name,
            kind=FindingKind.FACT,
            signals=(),
            since=standing[name].since if name in standing else pass_.at,
            calls=CallWord.LOOK,
            cause=Cause.UNCLEAR,
            evidence=None,
            sentence=sentences.unreadable(unread, explanation),
            data={"times": unread, "outcome": pass_.outcome.value},
        )
    return replace(state, unread=unread, standing=standing)


def _unplugged(pass_: Pass) -> bool:
    """Whether a drive is away because people unplug such drives."""
    return pass_.outcome is Outcome.ABSENT and pass_.drive is not None and pass_.drive.kind is Kind.USB


def _take_in(state: DriveState, pass_: Pass, reading: Reading) -> tuple[DriveState, list[Entry]]:
    """A reading: levels, rises, ledgers, damage, facts."""
    counts = {
        value.signal: value.value
        for value in reading.values
        if value.signal in STREAM_OF and isinstance(value.value, int)
    }
    spare = reading.number("available-spare")
    first = state.first_at is None
    happened, rises = _rises(state, pass_, counts)
    now = replace(
        state,
        first_at=pass_.at if first else state.first_at,
        unread=0,
        firsts={**counts, **({"available-spare": spare} if spare is not None else {}), **state.firsts},
        streams=_streams(state, pass_, reading, counts, rises),
        spots=_damage(state, pass_, reading),
        hours=_or(reading.number("power-on-hours"), state.hours),
        latest={**state.latest, **counts},
    )
    shown = (
        *facts.facts(reading, at=pass_.at, first_spare=now.firsts.get("available-spare")),
        *_first_defects(now, pass_, rises),
        *_drifts(now, pass_),
        *_rule(now, pass_),
    )
    new_alarms = [one for one in shown if one.kind is FindingKind.DRIFT and one.name not in state.standing]
    happened += [
        _entry(pass_, "drift", one.sentence, evidence=one.evidence, **dict(one.data)) for one in new_alarms
    ]
    return replace(now, standing=_standing(state.standing, shown)), happened


def _or(value: int | None, other: int | None) -> int | None:
    return other if value is None else value


def _rises(state: DriveState, pass_: Pass, counts: Mapping[str, int]) -> tuple[list[Entry], Mapping[str, int]]:
    """How far each counter rose since its last usable value; the first value is a level."""
    happened, rises = [], {}
    for signal, new in counts.items():
        old = state.latest.get(signal)
        if old is None:
            continue
        moved = increments.step(old, new, may_fall=signal in MAY_FALL)
        if moved.reset:
            happened.append(
                _entry(pass_, "reset", sentences.fell(signal, old, new), signal=signal, old=old, new=new)
            )
        elif moved.rise:
            rises[signal] = moved.rise
            happened.append(
                _entry(pass_, "rise", sentences.rose(signal, old, new), signal=signal, old=old, new=new)
            )
    return happened, rises


def _streams(
    state: DriveState, pass_: Pass, reading: Reading, counts: Mapping[str, int], rises: Mapping[str, int]
) -> Mapping[str, episodes.Stream]:
    """Every stream that the drive has, carried to this day."""
    day = day_number(pass_.at)
    hours = reading.number("power-on-hours")
    powered = None if hours is None or state.hours is None else hours - state.hours
    streams = dict(state.streams)
    for norm in NORMS:
        if not any(signal in counts for signal in norm.signals):
            continue
        stream = streams.get(norm.stream) or episodes.begin(day)
        if day > stream.day:
            gap = episodes.powered_between(days=day - stream.day - 1, hours=powered)
            stream = episodes.next_day(stream, day=day, exposure=1 + gap, norm_per_day=norm.per_day)
        elif pass_.at < (state.last_at or 0) - DAY:
            # The clock was set back: closed days are not lived twice, the open one moves with the clock.
            stream = replace(stream, day=day)
        if any(signal in rises for signal in norm.signals):
            stream = episodes.rise(stream, norm_per_day=norm.per_day)
        streams[norm.stream] = stream
    return streams


def _turns(pass_: Pass, reading: Reading) -> bool:
    """Whether the drive has a turning platter, as far as can be told."""
    drive = pass_.drive
    if drive is None:
        return False
    if drive.rotation_rpm is not None or drive.kind is Kind.HDD:
        return True
    return drive.kind is Kind.SAS and reading.number("percentage-used") is None


def _damage(state: DriveState, pass_: Pass, reading: Reading) -> spots.Spots:
    """Damage for the odds rule, which was learnt on turning platters and is asked of nothing else."""
    if not _turns(pass_, reading):
        return state.spots
    return spots.seen(
        state.spots,
        day=day_number(pass_.at),
        replaced=_or(reading.number("reallocated-sectors"), reading.number("grown-defects")),
        pending=reading.number("pending-sectors"),
    )


def _first_defects(state: DriveState, pass_: Pass, rises: Mapping[str, int]) -> Iterator[Finding]:
    """The first rise of a defect counter since the drive has been watched, and whatever rose after it."""
    turning = pass_.reading is not None and _turns(pass_, pass_.reading)
    telling = [signal for signal in _DEFECTS if turning or signal not in _ONLY_TURNING]
    if not any(signal in rises for signal in telling):
        return
    risen = {
        signal: (state.firsts[signal], state.latest[signal])
        for signal in telling
        if signal in state.latest and state.latest[signal] > state.firsts[signal]
    }
    if not risen:
        # What rose had fallen before, below its first value: the rise alone tells.
        risen = {
            signal: (state.latest[signal] - rises[signal], state.latest[signal])
            for signal in telling
            if signal in rises
        }
    yield Finding(
        name="fact:first-defect",
        kind=FindingKind.FACT,
        signals=tuple(risen),
        since=pass_.at,
        calls=CallWord.LOOK,
        cause=Cause.MEDIA,
        evidence=None,
        sentence=sentences.fresh_defects(risen),
        data={signal: {"first": first, "now": now} for signal, (first, now) in risen.items()},
    )


def _drifts(state: DriveState, pass_: Pass) -> Iterator[Finding]:
    """Ledgers at or above their threshold."""
    for norm in NORMS:
        stream = state.streams.get(norm.stream)
        if stream is not None and stream.ledger.evidence >= norm.threshold:
            yield _drift(norm, stream, pass_)


def _drift(norm: Norm, stream: episodes.Stream, pass_: Pass) -> Finding:
    evidence = stream.ledger.evidence
    days = stream.powered + stream.exposure
    return Finding(
        name=f"drift:{norm.stream}",
        kind=FindingKind.DRIFT,
        signals=norm.signals,
        since=pass_.at,
        calls=CallWord.LOOK,
        cause=_CAUSES[norm.stream],
        evidence=evidence,
        sentence=sentences.drift(norm, episodes=stream.episodes, days=days, evidence=evidence),
        data={"stream": norm.stream, "episodes": stream.episodes, "days": days, "threshold": norm.threshold},
    )


def _rule(state: DriveState, pass_: Pass) -> Iterator[Finding]:
    """The odds rule."""
    day = day_number(pass_.at)
    score = spots.fourfold(state.spots, day)
    if score < spots.COPY:
        return
    retire = score >= spots.RETIRE
    limit = spots.RETIRE if retire else spots.COPY
    fresh = spots.fresh(state.spots, day)
    yield Finding(
        name="rule:damage-retire" if retire else "rule:damage-copy",
        kind=FindingKind.RULE,
        signals=("reallocated-sectors", "pending-sectors"),
        since=pass_.at,
        calls=CallWord.RETIRE if retire else CallWord.COPY,
        cause=Cause.MEDIA,
        evidence=None,
        sentence=sentences.damage(
            fresh=fresh,
            pending=state.spots.pending or 0,
            replaced=state.spots.replaced or 0,
            score=score / 4,
            limit=limit / 4,
            days=spots.WINDOW,
        ),
        data={"score": score / 4, "fresh": fresh, "limit": limit / 4},
    )


def _standing(before: Mapping[str, Finding], shown: tuple[Finding, ...]) -> Mapping[str, Finding]:
    """What stands after a reading: all that it shows, since it first did, and what lasts beyond it."""
    after = {name: one for name, one in before.items() if rules.lasting(one)}
    for one in shown:
        known = before.get(one.name)
        after[one.name] = one if known is None else replace(one, since=known.since)
    return after


def _evidence(state: DriveState) -> Mapping[str, float]:
    """M by signal: a stream's evidence belongs to each of its signals that the drive has."""
    return {
        signal: state.streams[norm.stream].ledger.evidence
        for norm in NORMS
        if norm.stream in state.streams
        for signal in norm.signals
        if signal in state.latest
    }


def _called(state: DriveState, pass_: Pass) -> Call | None:
    """The call, or None as long as nothing is known of the drive."""
    if state.first_at is None and not state.standing:
        if pass_.outcome is Outcome.NO_SMART and pass_.drive is not None and pass_.drive.kind is Kind.VIRTUAL:
            return rules.decide((), before=state.call, at=pass_.at, quiet=sentences.no_smart())
        return state.call
    return rules.decide(state.standing.values(), before=state.call, at=pass_.at, quiet=_quiet(state, pass_))


def _quiet(state: DriveState, pass_: Pass) -> str:
    old = {signal: count for signal in _DEFECTS if (count := state.firsts.get(signal, 0)) > 0}
    if state.first_at is None or state.first_at == pass_.at:
        return sentences.first_reading(old)
    return sentences.quiet(old, (pass_.at - state.first_at) / DAY)
