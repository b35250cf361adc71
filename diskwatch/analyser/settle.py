"""The owner's word: what has been seen to no longer asks for a deed, and is counted anew from that day."""

from collections.abc import Collection
from dataclasses import replace

from diskwatch.analyser.advance import Step, quiet, told_call
from diskwatch.analyser.state import DriveState
from diskwatch.analyser.traffic import noted
from diskwatch.judge import rules, sentences
from diskwatch.judge.neighbours import Days, Trouble
from diskwatch.records import Entry, Finding, Settled
from diskwatch.trends import episodes, probed
from diskwatch.trends.norms import NORMS
from diskwatch.trends.spots import Spots
from diskwatch.trends.temperature import accepted
from diskwatch.units import day_number

_DAMAGE = ("reallocated-sectors", "pending-sectors", "grown-defects")
"""Counters of which the odds rule is made."""


def settle(state: DriveState, word: Settled) -> Step:
    """Take the owner's word.

    Findings that it is about end, their ledgers begin anew, and counters are held against what they are now.
    What a drive still shows by itself (a failed self-assessment, a spare below its limit) comes back with the
    next reading: no word can end that.

    Args:
        state: the drive's state before.
        word: what was done.

    Returns:
        The new state, and for the day book the word and the change of the call, if any.
    """
    ended = {name: one for name, one in state.standing.items() if word.about(one.signals)}
    signals = {signal for signal in state.latest if word.about((signal,))}
    day = day_number(word.at)
    anew = {
        norm.stream: episodes.begin(max(day, state.streams[norm.stream].day))
        for norm in NORMS
        if norm.stream in state.streams and not signals.isdisjoint(norm.signals)
    }
    now = replace(
        state,
        base={**state.base, **{signal: state.latest[signal] for signal in signals}},
        streams={**state.streams, **anew},
        rose={stream: powered for stream, powered in state.rose.items() if stream not in anew},
        risen={signal: when for signal, when in state.risen.items() if signal not in signals},
        spots=_undisturbed(state.spots, signals),
        temperature=accepted(state.temperature) if word.about(("temperature",)) else state.temperature,
        latency=noted(state.latency, [signal for signal in state.latency if word.about((signal,))]),
        probe=None
        if state.probe is None
        else probed.noted(state.probe, late="drift:late-reads" in ended, speed="drift:probe-latency" in ended),
        settled={**state.settled, **dict.fromkeys(anew, word)},
        word=word,
        troubles=_returned(state) if not word.signals else state.troubles,
        unread=0 if not word.signals else state.unread,
        standing={name: one for name, one in state.standing.items() if name not in ended},
    )
    call = (
        None
        if state.call is None
        else rules.decide(now.standing.values(), before=state.call, at=word.at, quiet=quiet(now, word.at))
    )
    happened = [_told(word, ended.values(), state.last_at)]
    if call is not None and state.call is not None and call.word is not state.call.word:
        happened += told_call(state.call, call)
    return Step(state=replace(now, call=call), happened=tuple(happened))


def _returned(state: DriveState) -> Days:
    """The drive's days of trouble without those on which it was gone."""
    return {kind: days for kind, days in state.troubles.items() if kind != Trouble.GONE.value}


def _undisturbed(damage: Spots, signals: Collection[str]) -> Spots:
    return damage if set(_DAMAGE).isdisjoint(signals) else replace(damage, rises=())


def _told(word: Settled, ended: Collection[Finding], after: int | None) -> Entry:
    return Entry(
        at=word.at,
        drive=None,
        kind="settled",
        text=sentences.settled(word),
        data={
            "because": word.because,
            "signals": list(word.signals),
            "replaced_by": word.replaced_by,
            "ended": sorted(one.name for one in ended),
            # A pass of the same second may stand before the word or behind it: whoever judges anew must know.
            "after": after,
        },
    )
