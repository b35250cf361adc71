"""Facts from the machine's other senses: what its kernel, file systems and arrays saw of a drive.

What they count begins with the watch, so that a count above nothing calls at once, also before the drive itself
has been read. It stands until the owner has spoken; only what arrays show is a matter of the moment.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from diskwatch.judge import heard_told
from diskwatch.records import CallWord, Cause, Finding, FindingKind

FROM_NOTHING = frozenset(
    {"unreadable-sectors", "failed-writes", "dropouts", "file-system-errors", "array-dropouts"}
)
"""Counts whose very first value is held against none: each of them is something that the kernel saw happen."""

LAST_SECTOR = "last-unreadable-sector"
DEGRADED = "degraded-arrays"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Fact:
    """What a count above its base asks for."""

    name: str
    cause: Cause


_FACTS: Mapping[str, _Fact] = {
    "unreadable-sectors": _Fact(name="fact:unreadable-sector", cause=Cause.MEDIA),
    "failed-writes": _Fact(name="fact:failed-writes", cause=Cause.UNCLEAR),
    "dropouts": _Fact(name="fact:dropped-out", cause=Cause.CONTROLLER),
    "array-dropouts": _Fact(name="fact:array-dropped-it", cause=Cause.UNCLEAR),
    "file-system-errors": _Fact(name="fact:file-system", cause=Cause.UNCLEAR),
}


def facts(counts: Mapping[str, int], base: Mapping[str, int], *, at: int) -> Iterator[Finding]:
    """Every fact that the other senses state of a drive.

    Args:
        counts: what they count now, by signal.
        base: what each count is held against; missing ones against 0.
        at: when, UTC seconds since 1970.
    """
    for signal, fact in _FACTS.items():
        times = counts.get(signal, 0) - base.get(signal, 0)
        if times > 0:
            last = counts.get(LAST_SECTOR) if signal == "unreadable-sectors" else None
            yield _finding(fact, signal, times, last, at)
    degraded = counts.get(DEGRADED, 0)
    if degraded > 0:
        yield Finding(
            name="fact:array-degraded",
            kind=FindingKind.FACT,
            signals=(DEGRADED,),
            since=at,
            calls=CallWord.LOOK,
            cause=Cause.UNCLEAR,
            evidence=None,
            sentence=heard_told.degraded(degraded),
            data={"arrays": degraded},
        )


def _finding(fact: _Fact, signal: str, times: int, last: int | None, at: int) -> Finding:
    return Finding(
        name=fact.name,
        kind=FindingKind.FACT,
        signals=(signal,),
        since=at,
        calls=CallWord.LOOK,
        cause=fact.cause,
        evidence=None,
        sentence=heard_told.counted(signal, times, last),
        data={"times": times} if last is None else {"times": times, "last_sector": last},
    )
