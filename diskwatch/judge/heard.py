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
    """What counts above their base ask for; several tell of one thing where they are several sources of it."""

    name: str
    cause: Cause
    signals: tuple[str, ...]


_FACTS = (
    _Fact(name="fact:unreadable-sector", cause=Cause.MEDIA, signals=("unreadable-sectors",)),
    _Fact(name="fact:failed-writes", cause=Cause.UNCLEAR, signals=("failed-writes",)),
    _Fact(name="fact:dropped-out", cause=Cause.CONTROLLER, signals=("dropouts",)),
    _Fact(name="fact:array-dropped-it", cause=Cause.UNCLEAR, signals=("array-dropouts", "array-read-errors")),
    _Fact(
        name="fact:file-system",
        cause=Cause.UNCLEAR,
        signals=("file-system-errors", "ext4-errors", "btrfs-errors"),
    ),
)


def facts(counts: Mapping[str, int], base: Mapping[str, int], *, at: int) -> Iterator[Finding]:
    """Every fact that the other senses state of a drive.

    Args:
        counts: what they count now, by signal.
        base: what each count is held against.
        at: when, UTC seconds since 1970.
    """
    for fact in _FACTS:
        # What is seen for the first time, and did not begin with the watch, may be years old: a level.
        above = {
            signal: counts[signal] - base.get(signal, 0 if signal in FROM_NOTHING else counts[signal])
            for signal in fact.signals
            if signal in counts
        }
        above = {signal: times for signal, times in above.items() if times > 0}
        if above:
            last = counts.get(LAST_SECTOR) if "unreadable-sectors" in above else None
            yield _finding(fact, above, last, at)
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


def _finding(fact: _Fact, above: Mapping[str, int], last: int | None, at: int) -> Finding:
    # Several sources see the same errors, so that a sum would count them twice.
    times = max(above.values())
    return Finding(
        name=fact.name,
        kind=FindingKind.FACT,
        signals=tuple(above),
        since=at,
        calls=CallWord.LOOK,
        cause=fact.cause,
        evidence=None,
        sentence=heard_told.counted(fact.signals[0], times, last),
        data={"times": times} if last is None else {"times": times, "last_sector": last},
    )
