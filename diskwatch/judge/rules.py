"""From standing findings to the one call."""

from collections.abc import Iterable

from diskwatch.judge.causes import Explained
from diskwatch.records import Call, CallWord, Cause, Finding, FindingKind
from diskwatch.units import DAY

VERSION = 3
"""Of the rules as a whole; a ticket names it so that a call can be checked by the rules it followed."""

LINGERING = frozenset({"fact:hot", "fact:warns-of-heat"})
"""Passing findings that come and go with the hour of the day stand on for a while after they last showed."""

LINGER = 3 * DAY
"""Seconds that a lingering finding stands on: a drive that is hot every noon is one that is hot."""

PASSING = frozenset(
    {
        "fact:unreadable",
        "fact:comes-and-goes",
        "fact:hot",
        "fact:warns-of-heat",
        "fact:warns-of-enclosure",
        "fact:warns-of-power-loss",
        "fact:warns-of-humidity",
        "fact:array-degraded",
    }
)
"""Findings about the present moment end with what they tell of.

All others stand until evidence ends them (`LINK_QUIET`, `PENDING_QUIET`, `COOL`) or the owner speaks.
"""

OF_THE_LINK = frozenset({"drift:link", "fact:link-again"})
"""Findings about the link, which end on evidence."""

LINK_QUIET = 30.0
"""Powered days without a damaged transfer after which a link is taken for mended (a proposal; no source)."""

PENDING_QUIET = 90
"""Days without any new defect after which a sector that was rewritten asks for nothing more (likewise)."""

COOL = 14
"""Days since evidence of running hot last stood at its threshold after which it is over, if none is left."""

RECALLING = frozenset({"fact:comes-and-goes"})
"""Passing findings that tell of what was; one about what is now goes first."""

_WEIGHT = {FindingKind.FACT: 3, FindingKind.RULE: 2, FindingKind.DRIFT: 1, FindingKind.LEVEL: 0}


def lasting(finding: Finding) -> bool:
    """Whether a finding stands on after the readings cease to show it."""
    return finding.calls is not None and finding.name not in PASSING


def lingers(finding: Finding, at: int) -> bool:
    """Whether a finding that no longer shows stands on for now.

    Args:
        finding: with the time at which it last showed, ``last``, among its data.
        at: now, UTC seconds since 1970.
    """
    last = finding.data.get("last")
    return finding.name in LINGERING and isinstance(last, int) and 0 <= at - last < LINGER


def leading_first(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Findings in the order in which they matter.

    The strongest call first; of equal ones what lasts before what passes, facts before rules before drifts.
    """
    return tuple(
        sorted(
            findings,
            key=lambda one: (
                -(one.calls.rank if one.calls else -1),
                one.name in PASSING,
                one.name in RECALLING,
                -_WEIGHT[one.kind],
                -(one.evidence or 0.0),
                one.since,
                one.name,
            ),
        )
    )


def leading(findings: Iterable[Finding]) -> Finding | None:
    """The finding that decides the call; None where none asks for anything."""
    return next(iter(_asking(findings)), None)


def _asking(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    asking = [one for one in findings if one.calls is not None and one.calls is not CallWord.KEEP]
    return leading_first(asking) if len(asking) > 1 else tuple(asking)


def decide(
    findings: Iterable[Finding],
    *,
    before: Call | None,
    at: int,
    quiet: str,
    explained: Explained | None = None,
) -> Call:
    """The call that follows from what stands.

    Args:
        findings: everything that stands.
        before: the call until now, or None; what does not differ from it is this very call.
        at: now, UTC seconds since 1970.
        quiet: the sentence for when nothing asks for a deed.
        explained: what the drive's signs point to, where the table of causes was asked; without it the cause is
            what the leading finding points to, or, where that finding decided before, what it was then.

    Returns:
        The strongest call that a finding asks for, or keep.
    """
    asking = _asking(findings)
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
    cause, probability, second = _cause(lead, asking, before, explained)
    now = Call(
        word=word,
        at=before.at if before and before.word is word else at,
        cause=cause,
        cause_probability=probability,
        cause_second=second,
        reason=lead.sentence,
        rule=lead.name,
        evidence=lead.evidence if lead.kind is FindingKind.DRIFT else None,
    )
    return before if before == now else now


def _cause(
    lead: Finding, asking: tuple[Finding, ...], before: Call | None, explained: Explained | None
) -> tuple[Cause, float | None, Cause | None]:
    if explained is not None and explained.cause is not Cause.UNCLEAR:
        return explained.cause, explained.probability, explained.second
    if explained is None and before is not None and before.rule == lead.name and before.cause is not None:
        return before.cause, before.cause_probability, before.cause_second
    own = lead.cause or Cause.UNCLEAR
    others = [one.cause for one in asking[1:] if one.cause not in {None, own, Cause.UNCLEAR}]
    return own, None, others[0] if others else None
