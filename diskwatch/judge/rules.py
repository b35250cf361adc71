"""From standing findings to the one call."""

from collections.abc import Iterable

from diskwatch.records import Call, CallWord, Cause, Finding, FindingKind

VERSION = 1
"""Of the rules as a whole; a ticket names it so that a call can be checked by the rules it followed."""

PASSING = frozenset({"fact:unreadable", "fact:hot", "fact:warns-of-heat"})
"""Findings about the present moment end with what they tell of; all others stand until the owner speaks."""

_WEIGHT = {FindingKind.FACT: 3, FindingKind.RULE: 2, FindingKind.DRIFT: 1, FindingKind.LEVEL: 0}


def lasting(finding: Finding) -> bool:
    """Whether a finding stands on after the readings cease to show it."""
    return finding.calls is not None and finding.name not in PASSING


def leading_first(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Findings in the order in which they matter: the strongest call, then facts before rules before drifts."""
    return tuple(
        sorted(
            findings,
            key=lambda one: (
                -(one.calls.rank if one.calls else -1),
                -_WEIGHT[one.kind],
                -(one.evidence or 0.0),
                one.since,
                one.name,
            ),
        )
    )


def decide(findings: Iterable[Finding], *, before: Call | None, at: int, quiet: str) -> Call:
    """The call that follows from what stands.

    Args:
        findings: everything that stands.
        before: the call until now, or None.
        at: now, UTC seconds since 1970.
        quiet: the sentence for when nothing asks for a deed.

    Returns:
        The strongest call that a finding asks for, or keep. Its cause is the leading finding's; the runner-up
        is the next different cause among the findings that ask for something.
    """
    asking = [
        one for one in leading_first(findings) if one.calls is not None and one.calls is not CallWord.KEEP
    ]
    if not asking:
        if before is not None and before.word is CallWord.KEEP and before.reason == quiet:
            return before
        return Call(
            word=CallWord.KEEP,
            at=before.at if before and before.word is CallWord.KEEP else at,
            cause=None,
            cause_probability=None,
            cause_second=None,
            reason=quiet,
            rule="quiet",
            evidence=None,
        )
    lead = asking[0]
    word = lead.calls or CallWord.LOOK
    cause = lead.cause or Cause.UNCLEAR
    others = [one.cause for one in asking[1:] if one.cause not in {None, cause, Cause.UNCLEAR}]
    return Call(
        word=word,
        at=before.at if before and before.word is word else at,
        cause=cause,
        cause_probability=None,
        cause_second=others[0] if others else None,
        reason=lead.sentence,
        rule=lead.name,
        evidence=lead.evidence if lead.kind is FindingKind.DRIFT else None,
    )
