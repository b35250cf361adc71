"""What a drive's state shows by itself after a reading: drifts, fresh defects, the odds rule."""

from collections.abc import Iterable, Mapping

from diskwatch.analyser.counters import turns
from diskwatch.analyser.state import DriveState
from diskwatch.judge import odds, rules, sentences
from diskwatch.judge.odds_told import odds_told
from diskwatch.records import CallWord, Cause, Finding, FindingKind, Odds, Pass, Reading
from diskwatch.trends import spots
from diskwatch.trends.episodes import Stream
from diskwatch.trends.norms import NORMS, Norm
from diskwatch.units import day_number

DEFECTS = (
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

_THRESHOLDS: Mapping[str, float] = {norm.stream: norm.threshold for norm in NORMS}


def drifts(state: DriveState, pass_: Pass) -> Iterable[Finding]:
    """Ledgers at or above their threshold."""
    return [
        _drift(state, norm, stream, pass_)
        for norm in NORMS
        if (stream := state.streams.get(norm.stream)) is not None
        and stream.ledger.evidence >= _THRESHOLDS[norm.stream]
    ]


def _drift(state: DriveState, norm: Norm, stream: Stream, pass_: Pass) -> Finding:
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
        data={
            "stream": norm.stream,
            "signal": _latest_riser(state, norm),
            "episodes": stream.episodes,
            "days": days,
            "threshold": norm.threshold,
        },
    )


def _latest_riser(state: DriveState, norm: Norm) -> str:
    """The counter of a stream that rose last, the first named where several did: what the alarm is about."""
    return max(norm.signals, key=lambda signal: state.risen.get(signal, -1))


def fresh_defects(
    state: DriveState, pass_: Pass, reading: Reading, risen: Mapping[str, int]
) -> Iterable[Finding]:
    """The first rise of a defect counter since the drive has been watched, and whatever rose after it."""
    if not risen or risen.keys().isdisjoint(DEFECTS):
        return ()
    turning = turns(pass_, reading)
    telling = [signal for signal in DEFECTS if turning or signal not in _ONLY_TURNING]
    if risen.keys().isdisjoint(telling):
        return ()
    since = {**state.firsts, **state.base}
    above = {
        signal: (since[signal], state.latest[signal])
        for signal in telling
        if signal in state.latest and state.latest[signal] > since[signal]
    }
    # What fell before, below its first value, and rose again is told by this rise alone.
    shown = above or {
        signal: (state.latest[signal] - risen[signal], state.latest[signal])
        for signal in telling
        if signal in risen
    }
    found = told_odds(state, pass_)
    return (
        Finding(
            name="fact:first-defect",
            kind=FindingKind.FACT,
            signals=tuple(shown),
            since=pass_.at,
            calls=CallWord.LOOK,
            cause=Cause.MEDIA,
            evidence=None,
            sentence=sentences.fresh_defects(shown, odds_told(found)),
            data={signal: {"first": first, "now": now} for signal, (first, now) in shown.items()},
        ),
    )


def back(state: DriveState, pass_: Pass, risen: Mapping[str, int]) -> Iterable[Finding]:
    """Damaged transfers came back soon after the owner had seen to the link."""
    word = state.settled.get("link")
    if word is None or not risen:
        return ()
    norm = next(one for one in NORMS if one.stream == "link")
    again = {signal: risen[signal] for signal in norm.signals if signal in risen}
    stream = state.streams["link"]
    if not again or stream.powered + stream.exposure > rules.LINK_QUIET:
        return ()
    return (
        Finding(
            name="fact:link-again",
            kind=FindingKind.FACT,
            signals=tuple(again),
            since=pass_.at,
            calls=CallWord.LOOK,
            cause=Cause.LINK,
            evidence=None,
            sentence=sentences.link_again(again, word),
            data=dict(again),
        ),
    )


def showed(
    before: DriveState, pass_: Pass, damage: spots.Spots, risen: Mapping[str, int], firsts: Mapping[str, int]
) -> Mapping[str, int]:
    """What the drive has shown so far of the conditions that there are odds for.

    Args:
        before: the drive before the pass.
        pass_: the pass.
        damage: its damage after it.
        risen: how far counters rose with it.
        firsts: counters as first read.
    """
    if not damage.rises or pass_.drive is None or not odds.known_for(pass_.drive.kind):
        return before.showed
    day = day_number(pass_.at)
    return odds.shown(
        before.showed,
        day=day,
        fourfold=spots.fourfold(damage, day),
        risen=("reallocated-sectors" in risen, "pending-sectors" in risen),
        from_zero=firsts.get("reallocated-sectors") == firsts.get("pending-sectors") == 0,
        watched=day - day_number(pass_.at if before.first_at is None else before.first_at),
    )


def told_odds(state: DriveState, pass_: Pass) -> Odds | None:
    """What became of other drives that showed the same; None where there are no figures."""
    return odds.odds(state.showed, day=day_number(pass_.at)) if state.showed else None


def levels(state: DriveState, pass_: Pass) -> Iterable[Finding]:
    """What is worth knowing but calls nothing: the odds."""
    found = told_odds(state, pass_)
    if found is None:
        return ()
    return (
        Finding(
            name="level:odds",
            kind=FindingKind.LEVEL,
            signals=("reallocated-sectors", "pending-sectors"),
            since=pass_.at,
            calls=None,
            cause=None,
            evidence=None,
            sentence=odds_told(found),
            data={
                "condition": found.condition,
                "days": found.days,
                "share": found.share,
                "low": found.low,
                "high": found.high,
                "level": found.level,
                "drives": found.drives,
                "failed": found.failed,
                "source": found.source,
                "since_day": found.since_day,
            },
        ),
    )


def rule(state: DriveState, pass_: Pass) -> Iterable[Finding]:
    """The odds rule."""
    if not state.spots.rises:
        return ()
    day = day_number(pass_.at)
    score = spots.fourfold(state.spots, day)
    if score < spots.COPY:
        return ()
    retire = score >= spots.RETIRE
    limit = spots.RETIRE if retire else spots.COPY
    fresh = spots.fresh(state.spots, day)
    return (
        Finding(
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
                odds=odds_told(told_odds(state, pass_)),
            ),
            data={"score": score / 4, "fresh": fresh, "limit": limit / 4},
        ),
    )
