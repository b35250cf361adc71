"""Why a drive has its call: the chain from readings to the deed, and what would change it."""

from dataclasses import dataclass

from diskwatch.analyser import heat
from diskwatch.analyser.causation import Causation, causation
from diskwatch.analyser.outcomes import UNREAD_LIMIT
from diskwatch.analyser.state import DriveState
from diskwatch.analyser.timing import Timing, Warm, joint, timings, warm
from diskwatch.judge import changes, odds, rulebook, rules
from diskwatch.records import Call, CallWord, Finding, Odds
from diskwatch.trends import ledger, spots
from diskwatch.trends.episodes import ABSORBED, Stream
from diskwatch.trends.norms import BUDGET, MAY_FALL, NORMS, Norm
from diskwatch.trends.probed import Probed
from diskwatch.units import day_number


@dataclass(frozen=True, slots=True, kw_only=True)
class CounterPast:
    """A counter that is followed.

    Attributes:
        signal: its name.
        first: value when the drive was first read.
        latest: value as last read.
    """

    signal: str
    first: int
    latest: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Evidence:
    """What one stream's ledger has come to.

    Attributes:
        stream: its name.
        signals: counters of it that this drive has.
        days: M in days of watching.
        alarms_at: M in days at which it alarms.
        guaranteed_at: M in days at which the bound is proved; the difference rests on a computation.
        norm_per_year: tolerated episodes a powered year.
        share: its part of the budget of false alarms.
        episodes: how many opened so far.
        powered_days: powered days counted so far.
        after_one_more: M in days if another episode opened on the next day that counts.
    """

    stream: str
    signals: tuple[str, ...]
    days: float
    alarms_at: float
    guaranteed_at: float
    norm_per_year: float
    share: float
    episodes: int
    powered_days: float
    after_one_more: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Damage:
    """What the odds rule measures.

    Attributes:
        fresh: spots that rose within the window.
        pending: sectors pending now; None where the drive does not tell.
        replaced: sectors replaced so far; None likewise.
        measure: S; 0 without fresh damage.
        copy_at: S from which the data should be copied off.
        retire_at: S from which the drive should not be relied on.
        window_days: days that damage counts as fresh.
    """

    fresh: int
    pending: int | None
    replaced: int | None
    measure: float
    copy_at: float
    retire_at: float
    window_days: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanation:
    """The chain behind a call.

    Attributes:
        call: what to do; None until the drive has been read.
        first_read: when it was first read, UTC seconds since 1970; None until then.
        counters: the counters that are followed.
        evidence: one a ledger of counters.
        timings: one a direction of latency.
        probe: what its probes have come to; None where it was never probed.
        warm: how warm it runs; None for a drive that tells no temperature.
        joint: evidence of all ledgers together, M in days.
        damage: what the odds rule measures; None where it does not apply.
        findings: what stands, leading one first.
        would_change: what would change the call, one sentence each.
        rules_version: version of the rules as a whole.
        rule: the rule that decided, in one sentence; None until the drive has been read.
        causation: the rows of the table of causes behind the call; None where the table was not asked.
        odds: what became of other drives that showed the same; None where there are no figures.
    """

    call: Call | None
    first_read: int | None
    counters: tuple[CounterPast, ...]
    evidence: tuple[Evidence, ...]
    timings: tuple[Timing, ...]
    probe: Probed | None
    warm: Warm | None
    joint: float
    damage: Damage | None
    findings: tuple[Finding, ...]
    would_change: tuple[str, ...]
    rules_version: int
    rule: str | None
    causation: Causation | None
    odds: Odds | None


def explain(state: DriveState) -> Explanation:
    """Lay out why a state has the call that it has."""
    evidence = tuple(
        _evidence(norm, state.streams[norm.stream], state) for norm in NORMS if norm.stream in state.streams
    )
    return Explanation(
        call=state.call,
        first_read=state.first_at,
        counters=tuple(
            CounterPast(signal=signal, first=state.firsts.get(signal, value), latest=value)
            for signal, value in sorted(state.latest.items())
        ),
        evidence=evidence,
        timings=timings(state),
        probe=state.probe,
        warm=warm(state),
        joint=joint(state),
        damage=_damage(state),
        findings=rules.leading_first(state.standing.values()),
        would_change=_would_change(state, evidence),
        rules_version=rules.VERSION,
        rule=None if state.call is None else rulebook.told(state.call.rule),
        causation=causation(state),
        odds=None if state.last_at is None else odds.odds(state.showed, day=day_number(state.last_at)),
    )


def _evidence(norm: Norm, stream: Stream, state: DriveState) -> Evidence:
    factors = ledger.count_factors(episode=True, exposure=1, norm_per_day=norm.per_day)
    return Evidence(
        stream=norm.stream,
        signals=tuple(signal for signal in norm.signals if signal in state.latest),
        days=stream.ledger.evidence,
        alarms_at=norm.threshold,
        guaranteed_at=norm.guaranteed,
        norm_per_year=norm.per_year,
        share=norm.share,
        episodes=stream.episodes,
        powered_days=stream.powered + stream.exposure,
        after_one_more=ledger.after(stream.ledger, factors).evidence,
    )


def _damage(state: DriveState) -> Damage | None:
    if state.last_at is None or (state.spots.replaced is None and state.spots.pending is None):
        return None
    day = day_number(state.last_at)
    return Damage(
        fresh=spots.fresh(state.spots, day),
        pending=state.spots.pending,
        replaced=state.spots.replaced,
        measure=spots.fourfold(state.spots, day) / 4,
        copy_at=spots.COPY / 4,
        retire_at=spots.RETIRE / 4,
        window_days=spots.WINDOW,
    )


def _would_change(state: DriveState, evidence: tuple[Evidence, ...]) -> tuple[str, ...]:
    call = state.call
    if call is None:
        return (changes.needs_reading(),)
    if state.first_at is None and call.word is CallWord.KEEP:
        return (changes.virtual_stays(),)
    told = [_ends(state)] if call.word is not CallWord.KEEP else []
    if call.word is CallWord.KEEP:
        told.append(changes.first_defect_would())
        told += [
            changes.one_more_would(one.stream, one.days, one.after_one_more, one.alarms_at, ABSORBED)
            for one in evidence
        ]
        told.append(changes.unread_would(UNREAD_LIMIT))
    if call.word.rank < CallWord.COPY.rank and _damage(state) is not None:
        told.append(changes.damage_would("copy", spots.COPY / 4, spots.WINDOW))
    if call.word.rank < CallWord.RETIRE.rank:
        if _damage(state) is not None:
            told.append(changes.damage_would("retire", spots.RETIRE / 4, spots.WINDOW))
        told.append(changes.verdict_would())
    told.append(changes.budget(BUDGET))
    return tuple(told)


def _ends(state: DriveState) -> str:
    """What ends a call that asks for something."""
    lasting = [one for one in state.standing.values() if rules.lasting(one)]
    if not lasting:
        return changes.passes()
    if any(rulebook.rule_of(one.name).stated for one in lasting):
        return changes.drive_says_so()
    if all(one.name in rules.OF_THE_LINK for one in lasting):
        return changes.falls_with_the_link(rules.LINK_QUIET)
    if all(one.name == heat.NAME for one in lasting):
        return changes.falls_when_cool(rules.COOL)
    if all(one.name == "fact:first-defect" and MAY_FALL.issuperset(one.signals) for one in lasting):
        return changes.falls_when_rewritten(rules.PENDING_QUIET)
    return changes.stands()
