"""Whether a ticket holds together: counts add up, times are in order, evidence and call follow.

Everything here reads a document that is as the schema asks.
"""

from collections.abc import Iterator, Mapping, Sequence
from itertools import pairwise
from math import exp, expm1, isclose
from typing import Any

from diskwatch.judge import rules
from diskwatch.records import CallWord, Cause, Finding, FindingKind
from diskwatch.ticket.asked import asked_for
from diskwatch.units import epoch_of

_CLOSE = 1e-9
_MOST_DAYS = 100_000


def loose_ends(ticket: Mapping[str, Any]) -> Iterator[str]:
    """What does not fit, one sentence each."""
    yield from _counts(ticket)
    yield from _order(ticket)
    yield from _present(ticket)
    yield from _evidence(ticket)
    yield from _call(ticket)


def unchecked(ticket: Mapping[str, Any]) -> Iterator[str]:
    """What this program cannot check of a ticket, one sentence each."""
    version = ticket["made_by"]["rules_version"]
    if version != rules.VERSION:
        yield (
            f"not checked: the call, since it follows version {version} of the rules and this program knows "
            f"version {rules.VERSION}"
        )


def _counts(ticket: Mapping[str, Any]) -> Iterator[str]:
    watching = ticket["watching"]
    passes = sum(one["passes"] for one in watching["passes_by_outcome"])
    if passes != watching["passes"]:
        yield f"watching.passes says {watching['passes']:,}, its outcomes add up to {passes:,}"
    read = sum(one["passes"] for one in watching["passes_by_outcome"] if one["outcome"] == "read")
    if watching["days_read"] > read:
        yield f"watching.days_read says {watching['days_read']:,} days, but only {read:,} passes read the drive"
    thinned = ticket["thinned"] or {"events": 0, "changes": 0}
    left_out = sum(one["changes_left_out"] for one in ticket["signals"])
    shortened = bool(thinned.get("shortened"))
    if left_out != thinned["changes"] and not shortened:
        yield f"thinned.changes says {thinned['changes']:,}, the signals lack {left_out:,}"
    known = {one["member"] for one in ticket["not_known"]}
    for name in sorted(known):
        if ticket.get(name) is not None:
            yield f"not_known names {name}, which is there"


def _order(ticket: Mapping[str, Any]) -> Iterator[str]:
    for name in ("events", "moves", "gaps"):
        found = ticket["watching"]["gaps"] if name == "gaps" else ticket[name]
        key = {"events": "at", "moves": "since", "gaps": "from"}[name]
        yield from _rising(name, [one[key] for one in found])
    for signal in ticket["signals"]:
        yield from _rising(f"signals {signal['name']}", [change[0] for change in signal["changes"] or ()])
    for gap in ticket["watching"]["gaps"]:
        if gap["from"] and gap["until"] and gap["from"] >= gap["until"]:
            yield f"watching.gaps: one ends at {gap['until']}, before it begins"


def _rising(name: str, times: Sequence[str | None]) -> Iterator[str]:
    told = [one for one in times if one is not None]
    late = next((two for one, two in pairwise(told) if two < one), None)
    if late is not None:
        yield f"{name} are not in order: {late} stands too late"


def _present(ticket: Mapping[str, Any]) -> Iterator[str]:
    """A signal's latest value is one of its changes: mostly the last, unless the clock was set back."""
    for signal in ticket["signals"]:
        changes = signal["changes"]
        if changes and [signal["latest"]["at"], signal["latest"]["value"]] not in changes:
            yield f"signals {signal['name']}: no change led to the latest value"


def _evidence(ticket: Mapping[str, Any]) -> Iterator[str]:
    evidence = {one["name"]: one["evidence_days"] for one in ticket["findings"]}
    for ledger in ticket["ledgers"] or ():
        goals = {**evidence, "now": ledger["evidence_days"]}
        for way in ledger["ways"]:
            of, stream = way["of"], ledger["stream"]
            goal = goals.get(of)
            try:
                reached = worked_out(ledger, way)
            except (ArithmeticError, ValueError) as error:
                yield f"ledgers {stream}: the way to {of} cannot be worked out: {error}"
                continue
            if goal is None:
                yield f"ledgers {stream}: a way leads to {of}, which is not there"
            elif not (_same(reached, goal) and _same(reached, way["evidence_days"])):
                yield f"ledgers {stream}: the way to {of} ends at {reached:.10g} days, not at {goal:.10g}"


def worked_out(ledger: Mapping[str, Any], way: Mapping[str, Any]) -> float:
    """The evidence that a way leads to, by the recursion that the schema publishes.

    Args:
        ledger: norm, ratios and the rest.
        way: state and steps.

    Raises:
        ArithmeticError: its numbers lead nowhere.
        ValueError: it has more days than any drive, or not one sum a ratio.
    """
    if sum(step["days"] for step in way["steps"]) > _MOST_DAYS:
        raise ValueError(f"it has more than {_MOST_DAYS:,} days")
    norm, cap = ledger["norm_per_day"], ledger["cap"]
    ratios, sums = ledger["ratios"], list(way["sums"])
    e, a, decided, opened = way["exposure"], way["absorbing"], way["decided"], way["opened"]
    for step in way["steps"]:
        for _ in range(step["days"]):
            if step["exposure"] is not None:
                absorbed = min(a, e)
                counted = e - absorbed
                if not decided and counted > 0:
                    sums = [
                        min(cap, (total + counted) * exp(-(ratio - 1) * norm * counted))
                        for ratio, total in zip(ratios, sums, strict=True)
                    ]
                a = ledger["absorbed_days"] if opened else a - absorbed
                e, decided, opened = step["exposure"], False, False
            if step["rose"] and not decided:
                if a > 0:
                    decided = e > a
                else:
                    sums = [
                        min(cap, (total + e) * expm1(-ratio * norm * e) / expm1(-norm * e))
                        for ratio, total in zip(ratios, sums, strict=True)
                    ]
                    decided = opened = True
    return float(sum(sums) / len(sums))


def _same(one: float, other: float) -> bool:
    return isclose(one, other, rel_tol=_CLOSE, abs_tol=_CLOSE)


def _call(ticket: Mapping[str, Any]) -> Iterator[str]:
    call = ticket["call"]
    word = None if call is None else CallWord(call["word"])
    cause = None if call is None or call["cause"] is None else Cause(call["cause"])
    if ticket["asked_for"] != asked_for(word, cause):
        yield "asked_for does not follow from the call and its cause"
    if call is None or ticket["made_by"]["rules_version"] != rules.VERSION:
        return
    worked = rules.decide(
        [_finding(one) for one in ticket["findings"]], before=None, at=0, quiet=call["reason"], explained=None
    )
    if worked.word is not word:
        yield f"the call is {word}, but what stands asks for {worked.word}"
    elif worked.rule != call["rule"]:
        yield f"the call names the rule {call['rule']}, but what stands is led by {worked.rule}"


def _finding(told: Mapping[str, Any]) -> Finding:
    since = told["since"]
    return Finding(
        name=told["name"],
        kind=FindingKind(told["kind"]),
        signals=tuple(told["signals"]),
        since=0 if since is None else epoch_of(since),
        calls=None if told["calls"] is None else CallWord(told["calls"]),
        cause=None if told["cause"] is None else Cause(told["cause"]),
        evidence=told["evidence_days"],
        sentence=told["sentence"],
        data=told["data"],
    )
