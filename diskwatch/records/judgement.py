"""What is thought of a drive: findings, and the one call that follows from them."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum


class CallWord(StrEnum):
    """What to do with a drive, mildest first."""

    KEEP = "keep"
    LOOK = "look"
    COPY = "copy"
    RETIRE = "retire"

    @property
    def rank(self) -> int:
        """0 for keep to 3 for retire."""
        return tuple(CallWord).index(self)


class Cause(StrEnum):
    """What best explains a drive's findings together."""

    MEDIA = "media"
    HEAD = "head"
    LINK = "link"
    POWER = "power"
    HEAT = "heat"
    WEAR_OUT = "wear-out"
    SPARE = "spare"
    LOAD = "load"
    CONTROLLER = "controller"
    UNCLEAR = "unclear"


class FindingKind(StrEnum):
    """How a finding came about.

    DRIFT was found by a ledger and carries evidence; FACT needs no trend; RULE follows from the odds rule;
    LEVEL is worth knowing but calls nothing.
    """

    DRIFT = "drift"
    FACT = "fact"
    RULE = "rule"
    LEVEL = "level"


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One drift or fact about a drive.

    Attributes:
        name: what it is, unique among the drive's standing findings, say ``drift:media``.
        kind: how it came about.
        signals: the signals that it rests on.
        since: when it began to stand, UTC seconds since 1970.
        calls: the call that it asks for by itself; None where it calls nothing.
        cause: what it points to, or None.
        evidence: the ledger's M in days of watching; None for facts.
        sentence: one sentence with numbers, for a person.
        data: the numbers behind the sentence, plain JSON values.
    """

    name: str
    kind: FindingKind
    signals: tuple[str, ...]
    since: int
    calls: CallWord | None
    cause: Cause | None
    evidence: float | None
    sentence: str
    data: Mapping[str, object] = field(default_factory=dict)


@dataclass(frozen=True, slots=True, kw_only=True)
class Call:
    """What to do with a drive, and why.

    Attributes:
        word: keep, look, copy or retire.
        at: since when it has been this, UTC seconds since 1970.
        cause: what best explains the findings; None at keep.
        cause_probability: its probability, 0 to 1; None where none was worked out.
        cause_second: the runner-up, or None.
        reason: the leading reason in one sentence with numbers.
        rule: the name of the rule that decided.
        evidence: the leading finding's M in days; None where a fact or the odds rule called.
    """

    word: CallWord
    at: int
    cause: Cause | None
    cause_probability: float | None
    cause_second: Cause | None
    reason: str
    rule: str
    evidence: float | None
