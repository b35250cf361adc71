"""The JSON answers of the commands: names and shapes that scripts rely on; only ever added to."""

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from diskwatch.judge.expert import expert_line
from diskwatch.judge.stakes import margin_of, no_odds_of, odds_of, replace_by_of
from diskwatch.records import (
    Bays,
    DriveLine,
    Entry,
    Finding,
    Margin,
    Odds,
    ReplayedDrive,
    ReplaySummary,
    SignalNow,
)
from diskwatch.units import DAY, rfc3339

if TYPE_CHECKING:  # the analyser takes as long to load as all that ``bays`` needs together
    from diskwatch.analyser import Explanation
    from diskwatch.analyser.causation import Causation
    from diskwatch.judge.copy_plan import CopyPlan


def _at(at: int | None) -> str | None:
    return None if at is None else rfc3339(at)


def bays_answer(bays: Bays, *, machine: str) -> dict[str, Any]:
    """What ``bays --json`` prints.

    Args:
        bays: all drives.
        machine: what this machine is called, so that saved answers of several can be told apart.
    """
    return {
        "schema": "diskwatch/bays/1",
        "machine": machine,
        "at": rfc3339(bays.at),
        "watched": bays.watcher is not None,
        "trouble": list(bays.trouble),
        "drives": [drive_answer(line, bays.at) for line in bays.drives],
        "departed": [drive_answer(line, bays.at) for line in bays.departed],
    }


def drive_answer(line: DriveLine, at: int | None = None) -> dict[str, object]:
    """One drive of ``bays --json``.

    Args:
        line: the drive.
        at: the moment, UTC seconds since 1970; None for that of its last pass.
    """
    drive, call, last = line.drive, line.call, line.last_pass
    if at is None:
        at = line.first_seen if last is None else last.at
    left = margin_of(line, at)
    return {
        "serial": drive.identity.serial,
        "model": drive.identity.model,
        "wwn": drive.identity.wwn,
        "firmware": drive.firmware,
        "device": line.place.device,
        "bay": line.place.bay,
        "label": line.label,
        "asset": line.owner.asset,
        "warranty_until": line.owner.warranty_until,
        "backed_up": line.owner.backed_up,
        "replaced_by": line.owner.replaced_by,
        "kind": drive.kind.value,
        "capacity_bytes": drive.capacity_bytes,
        "rotation_rpm": drive.rotation_rpm,
        "lives_here": [mount.point for mount in line.place.lives_here],
        "first_seen": rfc3339(line.first_seen),
        "last_pass": None
        if last is None
        else {"at": rfc3339(last.at), "outcome": last.outcome.value, "explanation": last.explanation},
        "left_out": line.left_out,
        "call": call.word.value if call else None,
        "call_since": _at(call.at if call else None),
        "cause": call.cause.value if call and call.cause else None,
        "cause_probability": call.cause_probability if call else None,
        "cause_second": call.cause_second.value if call and call.cause_second else None,
        "reason": call.reason if call else None,
        "margin_days": _margin(left),
        "margin_reason": left.reason,
        "replace_by": _day(replace_by_of(line, at)),
        "odds": _odds(odds_of(line, at)),
        "odds_reason": no_odds_of(line, at),
        "signals": {signal.name: _signal(signal) for signal in line.signals},
    }


def _margin(left: Margin) -> dict[str, object] | None:
    if not left.known:
        return None
    return {
        "low": left.low,
        "high": left.high,
        "probability": left.probability,
        "signal": left.signal,
        "limit": left.limit,
    }


def _odds(odds: Odds | None) -> dict[str, object] | None:
    if odds is None:
        return None
    return {
        "days": odds.days,
        "share": odds.share,
        "low": odds.low,
        "high": odds.high,
        "probability": odds.level,
        "condition": odds.condition,
        "drives": odds.drives,
        "failed": odds.failed,
        "since": _day(odds.since_day),
        "source": odds.source,
    }


def _day(day: int | None) -> str | None:
    return None if day is None else rfc3339(day * DAY)[:10]


def _signal(signal: SignalNow) -> dict[str, object]:
    return {
        "value": signal.value,
        "unit": signal.unit,
        "since": rfc3339(signal.since),
        "evidence": signal.evidence,
    }


def daybook_answer(entries: tuple[Entry, ...], names: dict[int, str | None]) -> dict[str, object]:
    """What ``daybook --json`` prints.

    Args:
        entries: oldest first.
        names: what each drive is called there, by its number in the history.
    """
    return {
        "schema": "diskwatch/daybook/1",
        "entries": [
            {
                "at": rfc3339(entry.at),
                "drive": None if entry.drive is None else names.get(entry.drive),
                "kind": entry.kind,
                "text": entry.text,
                "data": dict(entry.data),
            }
            for entry in entries
        ],
    }


def why_answer(line: DriveLine, why: "Explanation", at: int | None = None) -> dict[str, object]:
    """What ``why --json`` prints: the drive as in ``bays``, and the chain behind its call."""
    damage = why.damage
    return {
        "schema": "diskwatch/why/1",
        "drive": drive_answer(line, at),
        "rule": why.call.rule if why.call else None,
        "rule_told": why.rule,
        "rules_version": why.rules_version,
        "first_read": _at(why.first_read),
        "readings": [{"signal": one.signal, "first": one.first, "latest": one.latest} for one in why.counters],
        "evidence": [
            {
                "stream": one.stream,
                "signals": list(one.signals),
                "days": one.days,
                "alarms_at": one.alarms_at,
                "guaranteed_at": one.guaranteed_at,
                "norm_per_year": one.norm_per_year,
                "share": one.share,
                "episodes": one.episodes,
                "powered_days": one.powered_days,
                "after_one_more": one.after_one_more,
            }
            for one in why.evidence
        ],
        "damage": None
        if damage is None
        else {
            "fresh": damage.fresh,
            "pending": damage.pending,
            "replaced": damage.replaced,
            "measure": damage.measure,
            "copy_at": damage.copy_at,
            "retire_at": damage.retire_at,
            "window_days": damage.window_days,
        },
        "cause_table": None if why.causation is None else _causation(why.causation),
        "findings": [_finding(one) for one in why.findings],
        "would_change": list(why.would_change),
    }


def _causation(found: "Causation") -> dict[str, object]:
    return {
        "posterior": dict(found.posterior),
        "prior": {cell.cause: cell.probability for cell in found.prior},
        "rows": [
            {
                "sign": row.sign,
                "showed": row.showed,
                "probabilities": {cell.cause: cell.probability for cell in row.cells},
                "sources": sorted({cell.source for cell in row.cells}),
            }
            for row in found.rows
        ],
    }


def copy_plan_answer(
    line: DriveLine, plan: "CopyPlan", told: Mapping[str, Sequence[str]], at: int
) -> dict[str, object]:
    """What ``copy-plan --json`` prints: the drive as in ``bays``, the numbers, and the same in words.

    Args:
        line: the drive.
        plan: its plan.
        told: the sentences by part of the plan.
        at: now, UTC seconds since 1970.
    """
    likely = plan.unreadable
    return {
        "schema": "diskwatch/copy-plan/1",
        "at": rfc3339(at),
        "drive": drive_answer(line),
        "holds": [
            {
                "point": held.mount.point,
                "used_bytes": held.mount.used_bytes,
                "total_bytes": held.mount.total_bytes,
                "what": [one.value for one in held.holds],
                "hours": _between(held.hours),
            }
            for held in plan.held
        ],
        "arrays": None
        if plan.arrays is None
        else [
            {
                "kind": array.kind,
                "name": array.name,
                "level": array.level,
                "members": array.members,
                "missing": array.missing,
                "rebuilding": array.rebuilding,
                "elsewhere": array.elsewhere,
            }
            for array in plan.arrays
        ],
        "used_bytes": plan.used_bytes,
        "used_is_incomplete": plan.incomplete,
        "read_rate": {
            "low": round(plan.rate.low),
            "high": round(plan.rate.high),
            "unit": "bytes per second",
            "source": "measured" if plan.rate.stretches else "usual for its sort",
            "stretches": plan.rate.stretches,
        },
        "hours": _between(plan.hours),
        "whole_drive_hours": _between(plan.whole_hours),
        "unreadable": None
        if likely is None
        else {
            "bits": likely.bits,
            "rate": {"low": likely.rates[0], "high": likely.rates[1]},
            "chance": {"low": likely.chances[0], "high": likely.chances[1]},
            "source": "what makers of its class allow at most; no forecast for this drive",
        },
        "pending_sectors": plan.pending,
        "backed_up": plan.backed_up,
        "told": {part: list(sentences) for part, sentences in told.items()},
    }


def _between(hours: tuple[float, float] | None) -> dict[str, float] | None:
    return None if hours is None else {"low": hours[0], "high": hours[1]}


def replay_answer(drives: tuple[ReplayedDrive, ...], summary: ReplaySummary) -> dict[str, object]:
    """What ``replay --json`` prints."""
    return {
        "schema": "diskwatch/replay/1",
        "drives": [
            {
                "serial": drive.serial,
                "model": drive.model,
                "first": rfc3339(drive.first),
                "last": rfc3339(drive.last),
                "failed": drive.failed,
                "worst": drive.worst.value if drive.worst else None,
                "calls": [
                    {
                        "at": rfc3339(call.at),
                        "call": call.word.value,
                        "cause": call.cause.value if call.cause else None,
                        "reason": call.reason,
                        "evidence": call.evidence,
                    }
                    for call in drive.calls
                ],
                "drifts": [
                    {"at": rfc3339(drift.at), "signal": drift.signal, "evidence": drift.evidence}
                    for drift in drive.drifts
                ],
            }
            for drive in drives
        ],
        "summary": {
            "drives": summary.drives,
            "failed": summary.failed,
            "warned_failed": summary.warned_failed,
            "warned_sound": summary.warned_sound,
            "median_lead_days": summary.median_lead_days,
            "drive_days": summary.drive_days,
            "skipped": summary.skipped,
        },
    }


def _finding(finding: Finding) -> dict[str, object]:
    return {
        "name": finding.name,
        "kind": finding.kind.value,
        "signals": list(finding.signals),
        "since": rfc3339(finding.since),
        "calls": finding.calls.value if finding.calls else None,
        "cause": finding.cause.value if finding.cause else None,
        "evidence": finding.evidence,
        "sentence": finding.sentence,
        "expert": expert_line(finding),
        "data": dict(finding.data),
    }
