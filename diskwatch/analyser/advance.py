"""One pass over one drive taken in: the state machine itself."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from diskwatch.analyser import absences, counters, endings, findings, heard, heat, outcomes, signs, wearing
from diskwatch.analyser.around import ALONE, RETRACTS, Around, bays, power_shared, troubles, witness
from diskwatch.analyser.outcomes import entry
from diskwatch.analyser.state import DriveState
from diskwatch.judge import facts, rules, sentences
from diskwatch.judge.causes import Explained
from diskwatch.records import Call, CallWord, Entry, Finding, FindingKind, Kind, Outcome, Pass, Reading
from diskwatch.trends.norms import NORMS
from diskwatch.units import day_number


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """What one pass led to.

    Attributes:
        state: the state after it.
        happened: what the day book should hold, in order; without the drive's number, which is not known here.
    """

    state: DriveState
    happened: tuple[Entry, ...]

    @property
    def call(self) -> Call | None:
        """What to do; None until the drive has been read."""
        return self.state.call

    @property
    def findings(self) -> tuple[Finding, ...]:
        """Everything that stands now, leading one first."""
        return rules.leading_first(self.state.standing.values())

    @property
    def evidence(self) -> Mapping[str, float]:
        """M in days by signal: a stream's evidence belongs to each of its signals that the drive has."""
        counted = {
            signal: self.state.streams[norm.stream].ledger.evidence
            for norm in NORMS
            if norm.stream in self.state.streams
            for signal in norm.signals
            if signal in self.state.latest
        }
        timed = {signal: now.evidence for signal, now in self.state.latency.items() if now.evidence is not None}
        felt = (
            {}
            if self.state.temperature.usual is None
            else {"temperature": self.state.temperature.ledger.evidence}
        )
        return {**counted, **timed, **felt, **_probed(self.state)}


def _probed(state: DriveState) -> Mapping[str, float]:
    probe = state.probe
    if probe is None:
        return {}
    late = {"late-reads": probe.late.ledger.evidence} if probe.judges_late else {}
    return late if probe.speed.reference is None else {**late, "probe-latency": probe.speed.ledger.evidence}


def advance(state: DriveState, pass_: Pass, around: Around = ALONE) -> Step:
    """Take in one pass.

    Args:
        state: the drive's state before it.
        pass_: how asking the drive went and what it brought.
        around: its bay and the other drives of the machine, where these are known.

    Returns:
        The new state and what follows from it. The same passes in the same order always give the same steps,
        however the state was saved and loaded between them.
    """
    happened = list(outcomes.told(state, pass_))
    if pass_.outcome is Outcome.READ and pass_.reading is not None:
        now, more = _taken_in(state, pass_, pass_.reading, around)
        happened += more
    else:
        now, told = heard.without_reading(outcomes.without_reading(state, pass_), pass_)
        happened += told
        now = _missed(now, pass_, around)
    lead = rules.leading(now.standing.values())
    told_signs = signs.put(now, pass_, lead, around)
    call = _called(now, pass_, lead, signs.explained(told_signs, lead))
    if call is not None and (state.call is None or call.word is not state.call.word):
        happened += told_call(state.call, call)
    if call is not state.call or told_signs != state.signs:
        now = replace(now, call=call, signs=told_signs)
    return Step(state=now, happened=tuple(happened))


def _missed(state: DriveState, pass_: Pass, around: Around) -> DriveState:
    """A pass that brought nothing may still be trouble that others share."""
    day = day_number(pass_.at)
    heard_today = [signal for signal, when in state.risen.items() if when == day]
    absent = [name for name in ("fact:unreadable",) if name in state.standing and state.unread]
    days = troubles(state, heard_today, absent, day)
    return (
        state if days is state.troubles else replace(state, troubles=days, bays=bays(state, days, around, day))
    )


def _taken_in(
    state: DriveState, pass_: Pass, reading: Reading, around: Around
) -> tuple[DriveState, list[Entry]]:
    """A reading: levels, rises, ledgers, damage, facts."""
    day = day_number(pass_.at)
    counts = first_counts = counters.followed(reading)
    if pass_.heard:
        listened = heard.followed(pass_)
        first_counts = {**counts, **heard.firsts(listened)}
        counts = {**counts, **listened}
    risen, happened = counters.rises(state, pass_, counts)
    happened = heard.news(happened, pass_)
    hours = reading.number("power-on-hours")
    streams = counters.streams(state, pass_, counts, risen, hours)
    firsts = _firsts(state, reading, first_counts)
    damage = counters.damage(state, pass_, reading)
    retracts, retracted = witness(state, reading)
    stated = tuple(facts.facts(reading, at=pass_.at, first_spare=firsts.get("available-spare")))
    days = troubles(state, (*risen, RETRACTS) if retracted else risen, [one.name for one in stated], day)
    days_felt, temperature = heat.carried(state, pass_, reading)
    # Written out: replace() takes three times as long, and a replay of years comes by here for every day.
    now = DriveState(
        parameters=state.parameters,
        first_at=pass_.at if state.first_at is None else state.first_at,
        last_at=pass_.at,
        outcome=pass_.outcome,
        slept=state.slept,
        unread=0,
        hours=state.hours if hours is None else hours,
        firsts=firsts,
        latest={**state.latest, **counts},
        base=state.base,
        risen={**state.risen, **dict.fromkeys(risen, day)} if risen else state.risen,
        rose=counters.rose(state.rose, streams, heard.in_streams(risen)) if risen else state.rose,
        streams=streams,
        spots=damage,
        showed=findings.showed(state, pass_, damage, risen, firsts),
        troubles=days,
        bays=bays(state, days, around, day),
        retracts=retracts,
        settled=state.settled,
        word=state.word,
        wearing=wearing.carried(state.wearing, reading, at=pass_.at, hours=_powered(state, hours)),
        warmth=days_felt,
        temperature=temperature,
        latency=state.latency,
        traffic_through=state.traffic_through,
        probe=state.probe,
        signs=state.signs,
        standing=state.standing,
        call=state.call,
    )
    shown = (
        *stated,
        *findings.fresh_defects(now, pass_, reading, risen),
        *findings.drifts(now, pass_),
        *heat.drift(now, pass_, reading),
        *findings.back(now, pass_, risen),
        *findings.rule(now, pass_),
        *heard.shown(now, pass_),
        *power_shared(now, pass_, around),
        *absences.comes_and_goes(now, pass_),
        *findings.levels(now, pass_),
    )
    alarms = [
        entry(pass_, "drift", one.sentence, evidence=one.evidence, **dict(one.data))
        for one in shown
        if one.kind is FindingKind.DRIFT and one.name not in state.standing
    ]
    if shown or now.standing:
        now, ended = endings.ended(replace(now, standing=_standing(state.standing, shown, pass_.at)), pass_)
        alarms += ended
    return now, [*happened, *alarms]


def _powered(state: DriveState, hours: int | None) -> int | None:
    """Powered hours since the reading before, or None where they are not known."""
    return None if hours is None or state.hours is None else hours - state.hours


def _firsts(state: DriveState, reading: Reading, counts: Mapping[str, int]) -> Mapping[str, int]:
    """What each counter, and the spare, was when first read."""
    spare = reading.number("available-spare")
    seen = counts if spare is None else {**counts, "available-spare": spare}
    return state.firsts if seen.keys() <= state.firsts.keys() else {**seen, **state.firsts}


def _standing(before: Mapping[str, Finding], shown: tuple[Finding, ...], at: int) -> Mapping[str, Finding]:
    """What stands after a reading: all that it shows, since it first did, and what lasts or lingers on."""
    after = {name: one for name, one in before.items() if rules.lasting(one) or rules.lingers(one, at)}
    for one in shown:
        now = replace(one, data={**one.data, "last": at}) if one.name in rules.LINGERING else one
        known = before.get(one.name)
        after[one.name] = now if known is None else replace(now, since=known.since)
    return after


def _called(state: DriveState, pass_: Pass, lead: Finding | None, explained: Explained | None) -> Call | None:
    """The call, or None as long as nothing is known of the drive."""
    if state.first_at is None and not state.standing:
        if pass_.outcome is Outcome.NO_SMART and pass_.drive is not None and pass_.drive.kind is Kind.VIRTUAL:
            return rules.decide((), before=state.call, at=pass_.at, quiet=sentences.no_smart())
        return state.call
    return rules.decide(
        state.standing.values(),
        before=state.call,
        at=pass_.at,
        quiet=quiet(state, pass_.at) if lead is None else "",
        explained=explained,
    )


def quiet(state: DriveState, at: int) -> str:
    """The reason for keep, where nothing asks for a deed."""
    firsts = state.firsts
    old = {signal: firsts[signal] for signal in findings.DEFECTS if signal in firsts and firsts[signal] > 0}
    if state.first_at is None or state.first_at == at:
        return sentences.first_reading(old)
    since = {**firsts, **state.base} if state.base else firsts
    risen = {signal: now - since[signal] for signal, now in state.latest.items() if now > since[signal]}
    return sentences.quiet(old, risen, state.word)


def told_call(before: Call | None, call: Call) -> Iterator[Entry]:
    """Say that the call changed; that a new drive is kept is no news."""
    if before is None and call.word is CallWord.KEEP:
        return
    was = before.word.value if before else None
    yield Entry(
        at=call.at,
        drive=None,
        kind="call",
        text=sentences.call_changed(was, call.word.value, call.reason),
        data={
            "call": call.word.value,
            "before": was,
            "cause": call.cause.value if call.cause else None,
            "rule": call.rule,
            "evidence": call.evidence,
        },
    )
