"""Every signal of the drive: first, baseline and latest value, and each change of what counts errors."""

from collections.abc import Mapping, Sequence
from statistics import median_low

from diskwatch.analyser import DriveState
from diskwatch.history.proof import BASELINE_DAYS, SignalPast
from diskwatch.records import DriveLine, SignalKind, SignalNow
from diskwatch.ticket.part import Json, Part, at, short
from diskwatch.units import DAY

_MOST_SIGNALS = 400


def signals_part(
    line: DriveLine, pasts: Sequence[SignalPast], state: DriveState | None, before: int | None
) -> tuple[Part, int]:
    """All signals by name, and how many changes were left out.

    Args:
        line: the drive with its signals as last read.
        pasts: their pasts.
        state: the analyser's state, or None where it cannot be read.
        before: leave out changes earlier than this, UTC seconds since 1970; None for none.
    """
    latest = {signal.name: signal for signal in line.signals}
    told, left_out = [], 0
    for past in pasts[:_MOST_SIGNALS]:
        now = latest.get(past.name)
        if now is None:
            continue
        kept = [
            [at(when), short(value) if isinstance(value, str) else value]
            for when, value in (past.changes if past.complete else ())
            if before is None or when >= before or (when, value) == past.first
        ]
        missing = len(past.changes) - len(kept) if past.complete else 0
        left_out += missing
        told.append(_told(past, now, state, kept, missing))
    return Part(value=told), left_out


def _told(
    past: SignalPast, now: SignalNow, state: DriveState | None, kept: Sequence[object], missing: int
) -> Json:
    return {
        "name": short(past.name),
        "unit": short(past.unit),
        "kind": past.kind.value,
        "source": short(past.source),
        "first": _value(*past.first),
        "baseline": _baseline(past, state),
        "latest": _value(now.since, now.value),
        "evidence_days": now.evidence,
        "changes": kept if past.complete else None,
        "changes_left_out": missing,
    }


def _value(when: int, value: int | str | None) -> Json:
    return {"at": at(when), "value": short(value) if isinstance(value, str) else value}


def _baseline(past: SignalPast, state: DriveState | None) -> int | None:
    """What the signal is held against.

    A counter against its first value, or that of the owner's last word about it; a measured value against the
    middle of its first weeks. What only grows by use has none.
    """
    counted: Mapping[str, int] = {} if state is None else {**state.firsts, **state.base}
    if past.name in counted:
        return counted[past.name]
    if past.kind is not SignalKind.GAUGE or past.unit == "opaque":
        return None
    until = past.first[0] + BASELINE_DAYS * DAY
    numbers = [value for when, value in past.changes if when < until and isinstance(value, int)]
    return median_low(numbers) if numbers else None
