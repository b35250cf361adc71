"""Any drive line that the records allow, also those that no sane machine brings."""

from typing import TypeVar

from hypothesis import settings, strategies as st

from diskwatch.records import (
    Call,
    CallWord,
    Cause,
    Drive,
    DriveLine,
    Finding,
    FindingKind,
    Identity,
    IoCounts,
    IoSpan,
    Kind,
    LastPass,
    Mount,
    Outcome,
    Place,
)

T = TypeVar("T")

# How long one example takes says something about the machine under test, nothing about the law.
unhurried = settings(deadline=None)

# Years 1970 to 9999: what a date can tell.
TIMES = st.integers(0, 253_402_000_000)
TEXTS = st.text(max_size=60)
SIZES = st.integers(0, 2**70)


def _maybe(strategy: st.SearchStrategy[T]) -> st.SearchStrategy[T | None]:
    return st.none() | strategy


IDENTITIES = st.builds(Identity, wwn=_maybe(TEXTS), model=_maybe(TEXTS), serial=_maybe(TEXTS), path=TEXTS)
DRIVES = st.builds(
    Drive,
    identity=IDENTITIES,
    kind=st.sampled_from(Kind),
    firmware=_maybe(TEXTS),
    capacity_bytes=_maybe(SIZES),
    rotation_rpm=st.none(),
)
MOUNTS = st.builds(Mount, point=TEXTS, used_bytes=_maybe(SIZES), total_bytes=_maybe(SIZES))
PLACES = st.builds(Place, device=TEXTS, bay=_maybe(TEXTS), lives_here=st.lists(MOUNTS, max_size=4).map(tuple))
CALLS = st.builds(
    Call,
    word=st.sampled_from(CallWord),
    at=TIMES,
    cause=_maybe(st.sampled_from(Cause)),
    cause_probability=_maybe(st.floats(0, 1)),
    cause_second=_maybe(st.sampled_from(Cause)),
    reason=st.text(max_size=300),
    rule=TEXTS,
    evidence=_maybe(st.floats(0, 1e12)),
)
FINDINGS = st.builds(
    Finding,
    name=TEXTS,
    kind=st.sampled_from(FindingKind),
    signals=st.just(()),
    since=TIMES,
    calls=_maybe(st.sampled_from(CallWord)),
    cause=_maybe(st.sampled_from(Cause)),
    evidence=_maybe(st.floats(0, 1e12)),
    sentence=TEXTS,
)
COUNTS = st.builds(
    IoCounts,
    reads=SIZES,
    writes=SIZES,
    read_bytes=SIZES,
    write_bytes=SIZES,
    read_ms=SIZES,
    write_ms=SIZES,
    busy_ms=SIZES,
)
SPANS = st.builds(IoSpan, drive=st.just(1), at=TIMES, seconds=st.floats(0, 1e9), counts=COUNTS)
PASSES = st.builds(LastPass, at=TIMES, outcome=st.sampled_from(Outcome), explanation=_maybe(TEXTS))
DRIVE_LINES = st.builds(
    DriveLine,
    number=st.integers(1, 99),
    drive=DRIVES,
    place=PLACES,
    label=_maybe(TEXTS),
    first_seen=TIMES,
    last_pass=_maybe(PASSES),
    call=_maybe(CALLS),
    findings=st.lists(FINDINGS, max_size=3).map(tuple),
    signals=st.just(()),
    traffic=_maybe(SPANS),
)
WIDTHS = st.sampled_from((40, 80, 120, 200)) | st.integers(1, 220)
