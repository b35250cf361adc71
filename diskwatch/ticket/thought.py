"""What is thought of the drive: the call, and the findings with their evidence, method and parameters."""

from collections.abc import Mapping

from diskwatch.records import Call, DriveLine, Finding, FindingKind
from diskwatch.ticket.part import Json, Part, at, plain_data, short
from diskwatch.trends import spots
from diskwatch.trends.norms import NORMS

_MOST_FINDINGS = 100
_METHODS: Mapping[FindingKind, str] = {
    FindingKind.DRIFT: "evidence ledger: a running figure whose false alarms stay bounded",
    FindingKind.FACT: "read from the drive or from the system; it needs no trend",
    FindingKind.RULE: "damage measure of fresh, pending and replaced sectors",
    FindingKind.LEVEL: "a level; it calls nothing by itself",
}
_NORMS = {norm.stream: norm for norm in NORMS}


def call_part(line: DriveLine) -> Part:
    """The call that stands."""
    call = line.call
    if call is None:
        return Part(value=None, reason="The drive has not been read yet.")
    return Part(value=told_call(call))


def told_call(call: Call) -> Json:
    """A call as it stands in a ticket."""
    return {
        "word": call.word.value,
        "since": at(call.at),
        "cause": call.cause.value if call.cause else None,
        "cause_probability": call.cause_probability,
        "cause_second": call.cause_second.value if call.cause_second else None,
        "reason": short(call.reason),
        "rule": short(call.rule),
        "evidence_days": call.evidence,
    }


def findings_part(line: DriveLine) -> Part:
    """All that stands, leading one first."""
    return Part(value=[told_finding(one) for one in line.findings[:_MOST_FINDINGS]])


def told_finding(finding: Finding) -> Json:
    """A finding as it stands in a ticket."""
    return {
        "name": short(finding.name),
        "kind": finding.kind.value,
        "signals": [short(signal) for signal in finding.signals[:_MOST_FINDINGS]],
        "since": at(finding.since),
        "calls": finding.calls.value if finding.calls else None,
        "cause": finding.cause.value if finding.cause else None,
        "evidence_days": finding.evidence,
        "sentence": short(finding.sentence),
        "data": plain_data(finding.data),
        "method": _METHODS[finding.kind],
        "parameters": _parameters(finding),
    }


def _parameters(finding: Finding) -> Json | None:
    if finding.kind is FindingKind.RULE:
        return {"window_days": spots.WINDOW, "copy_at": spots.COPY / 4, "retire_at": spots.RETIRE / 4}
    norm = _NORMS.get(str(finding.data.get("stream")))
    if finding.kind is not FindingKind.DRIFT or norm is None:
        return None
    return {
        "stream": norm.stream,
        "norm_per_year": norm.per_year,
        "share": norm.share,
        "alarms_at_days": norm.threshold,
        "guaranteed_at_days": norm.guaranteed,
    }
