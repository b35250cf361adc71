"""What the machine's other senses counted of a drive, taken in with any pass, whatever its outcome."""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import replace

from diskwatch.analyser import counters, findings
from diskwatch.analyser.outcomes import entry
from diskwatch.analyser.state import DriveState
from diskwatch.judge import heard as judge
from diskwatch.records import Entry, Finding, FindingKind, Outcome, Pass, SignalKind
from diskwatch.trends.norms import STREAM_OF
from diskwatch.units import day_number

_ABSENT = frozenset({Outcome.ASLEEP, Outcome.ABSENT})


def counts(pass_: Pass) -> Mapping[str, int]:
    """What the other senses count, by signal; what they could not tell is left out."""
    return {value.signal: value.value for value in pass_.heard if isinstance(value.value, int)}


def followed(pass_: Pass) -> Mapping[str, int]:
    """Of these the counts that only grow."""
    if not pass_.heard:
        return {}
    grow = {value.signal for value in pass_.heard if value.kind is SignalKind.COUNT}
    return {name: count for name, count in counts(pass_).items() if name in grow}


def firsts(counted: Mapping[str, int]) -> Mapping[str, int]:
    """What counts are held against from the start: those of things that happened, against none."""
    return {name: 0 if name in judge.FROM_NOTHING else count for name, count in counted.items()}


def in_streams(risen: Mapping[str, int]) -> Mapping[str, int]:
    """Of what rose, the counters that a ledger follows."""
    return {name: by for name, by in risen.items() if name in STREAM_OF}


def shown(state: DriveState, pass_: Pass) -> Iterator[Finding]:
    """The facts that the other senses state.

    Args:
        state: the drive, with what it was first.
        pass_: the pass that brought them.
    """
    if not pass_.heard:
        return iter(())
    return judge.facts(counts(pass_), {**state.firsts, **state.base}, at=pass_.at)


def news(entries: Iterable[Entry], pass_: Pass) -> tuple[Entry, ...]:
    """Without the rises of what was heard: each event has its own entry already, from when it happened."""
    if not pass_.heard:
        return tuple(entries)
    own = {value.signal for value in pass_.heard}
    return tuple(one for one in entries if one.kind != "rise" or one.data.get("signal") not in own)


def without_reading(state: DriveState, pass_: Pass) -> tuple[DriveState, tuple[Entry, ...]]:
    """Take in what was heard of a drive that brought no reading.

    One that sleeps or is away moves its ledgers only where something was heard: it is not known to be powered.

    Args:
        state: the drive, after the outcome of the pass was taken in.
        pass_: the pass.
    """
    counted = followed(pass_)
    known = {
        **state.firsts,
        **{name: first for name, first in firsts(counted).items() if name not in state.firsts},
    }
    before = replace(state, firsts=known)
    risen, happened = counters.rises(state, pass_, counted)
    news_of_it = bool(risen) or any(
        known[name] != count for name, count in counted.items() if name not in state.latest
    )
    if pass_.outcome in _ABSENT and not news_of_it:
        return state, ()
    streams = counters.streams(state, pass_, counted, risen, None)
    now = replace(
        before,
        latest={**state.latest, **counted},
        risen={**state.risen, **dict.fromkeys(risen, day_number(pass_.at))},
        rose=counters.rose(state.rose, streams, in_streams(risen)),
        streams=streams,
    )
    found = (*shown(now, pass_), *findings.drifts(now, pass_))
    alarms = tuple(
        entry(pass_, "drift", one.sentence, evidence=one.evidence, **dict(one.data))
        for one in found
        if one.kind is FindingKind.DRIFT and one.name not in state.standing
    )
    standing = dict(state.standing)
    if any(value.signal == judge.DEGRADED for value in pass_.heard):
        standing.pop("fact:array-degraded", None)
    for one in found:
        kept = state.standing.get(one.name)
        standing[one.name] = one if kept is None else replace(one, since=kept.since)
    return replace(now, standing=standing), (*news(happened, pass_), *alarms)
