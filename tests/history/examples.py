"""Invented drives and rounds for the tests of the history."""

from dataclasses import replace
from typing import Any

from hypothesis import strategies as st

from diskwatch.history.writer import History
from diskwatch.records import (
    Attribute,
    Call,
    CallWord,
    Cause,
    Drive,
    DriveRound,
    Entry,
    Failing,
    Finding,
    FindingKind,
    Identity,
    IoCounts,
    IoSpan,
    Kind,
    KnownDrive,
    Mount,
    Outcome,
    Pass,
    Place,
    Reading,
    Round,
    SelfTest,
    SignalKind,
    Value,
)

NOON = 1_796_126_400  # 2026-12-01T12:00:00Z
DAY = 86_400

# What drives and people write: anything that UTF-8 can carry, odd letters included.
words = st.text(st.characters(exclude_categories=["Cs"]), max_size=12)
maybe_words = st.none() | words
times = st.integers(0, 2**40)
counts = st.integers(0, 2**62)
vast = st.integers(-(2**130), 2**130)
shares = st.none() | st.floats(0, 1)
days = st.none() | st.floats(0, allow_nan=False, allow_infinity=True)
plain_json = st.dictionaries(
    st.text(max_size=5),
    st.none() | st.booleans() | vast | st.floats(allow_nan=False) | st.text(max_size=5),
    max_size=3,
)

# What tells drives apart must come back to the letter, also where it is no proper text.
names = st.text(st.characters(), max_size=12)
maybe_names = st.none() | names
identities = st.builds(Identity, wwn=maybe_names, model=maybe_names, serial=maybe_names, path=names)
mounts = st.builds(Mount, point=names, used_bytes=st.none() | vast, total_bytes=st.none() | vast)
drives = st.builds(
    Drive,
    identity=identities,
    kind=st.sampled_from(Kind),
    firmware=maybe_words,
    capacity_bytes=st.none() | vast,
    rotation_rpm=st.none() | vast,
)
places = st.builds(Place, device=words, bay=maybe_words, lives_here=st.lists(mounts, max_size=2).map(tuple))
values = st.none() | vast | words
findings = st.builds(
    Finding,
    name=words,
    kind=st.sampled_from(FindingKind),
    signals=st.lists(words, max_size=2).map(tuple),
    since=times,
    calls=st.none() | st.sampled_from(CallWord),
    cause=st.none() | st.sampled_from(Cause),
    evidence=days,
    sentence=words,
    data=plain_json,
)
calls = st.builds(
    Call,
    word=st.sampled_from(CallWord),
    at=times,
    cause=st.none() | st.sampled_from(Cause),
    cause_probability=shares,
    cause_second=st.none() | st.sampled_from(Cause),
    reason=words,
    rule=words,
    evidence=days,
)
entries = st.builds(Entry, at=times, drive=st.none(), kind=words, text=words, data=plain_json)
attributes = st.builds(
    Attribute,
    number=st.integers(1, 255),
    name=st.text(max_size=8),
    value=st.none() | vast,
    worst=st.none() | vast,
    threshold=st.none() | vast,
    prefail=st.booleans(),
    raw=st.text(max_size=8),
    failing=st.none() | st.sampled_from(Failing),
)
self_tests = st.builds(
    SelfTest,
    name=st.text(max_size=8),
    result=st.text(max_size=8),
    extended=st.booleans(),
    passed=st.none() | st.booleans(),
    unreadable=st.booleans(),
    hours=st.none() | vast,
    lba=st.none() | vast,
)
readings_beside_values = st.builds(
    Reading,
    values=st.just(()),
    attributes=st.lists(attributes, max_size=3).map(tuple),
    self_tests=st.lists(self_tests, max_size=2).map(tuple),
    warning_celsius=st.none() | vast,
    critical_celsius=st.none() | vast,
)


def a_drive(serial: str = "INVENTED-1", device: str = "/dev/sda", **changes: Any) -> Drive:
    drive = Drive(
        identity=Identity(
            wwn=f"naa.5{serial.encode().hex()[-15:]}", model="Aldertree 4000", serial=serial, path=device
        ),
        kind=Kind.HDD,
        firmware="AT01",
        capacity_bytes=4_000_787_030_016,
        rotation_rpm=7200,
    )
    return replace(drive, **changes)


def a_place(device: str = "/dev/sda", bay: str | None = "ata-1") -> Place:
    return Place(device=device, bay=bay, lives_here=(Mount(point="/home", used_bytes=5, total_bytes=9),))


def a_value(
    signal: str = "pending-sectors",
    value: int | str | None = 0,
    unit: str = "sectors",
    kind: SignalKind = SignalKind.COUNT,
    reason: str | None = None,
) -> Value:
    return Value(signal=signal, value=value, unit=unit, kind=kind, source="attribute 197", reason=reason)


def a_pass(
    at: int = NOON,
    *found: Value,
    outcome: Outcome = Outcome.READ,
    explanation: str | None = None,
    attributes: tuple[Attribute, ...] = (),
) -> Pass:
    reading = Reading(values=found, attributes=attributes) if outcome is Outcome.READ else None
    return Pass(
        at=at,
        outcome=outcome,
        explanation=explanation,
        reading=reading,
        exit_bits=0,
        took_ms=12,
    )


def a_finding(name: str = "drift:media", **changes: Any) -> Finding:
    finding = Finding(
        name=name,
        kind=FindingKind.DRIFT,
        signals=("pending-sectors",),
        since=NOON,
        calls=CallWord.LOOK,
        cause=Cause.MEDIA,
        evidence=4000.0,
        sentence="8 sectors wait to be rewritten.",
        data={"sectors": 8},
    )
    return replace(finding, **changes)


def a_call(word: CallWord = CallWord.LOOK, at: int = NOON, **changes: Any) -> Call:
    call = Call(
        word=word,
        at=at,
        cause=Cause.MEDIA,
        cause_probability=0.8,
        cause_second=Cause.HEAD,
        reason="8 sectors wait to be rewritten.",
        rule="ledger",
        evidence=4000.0,
    )
    return replace(call, **changes)


def a_part(known: KnownDrive, pass_: Pass | None = None, **changes: Any) -> DriveRound:
    part = DriveRound(known=known, pass_=pass_ or a_pass(NOON, a_value()), state=None)
    return replace(part, **changes)


def a_round(*parts: DriveRound, at: int = NOON, entries: tuple[Entry, ...] = ()) -> Round:
    return Round(at=at, drives=parts, entries=entries)


def a_span(drive: int = 1, at: int = NOON, seconds: float = 10.0, **changes: int) -> IoSpan:
    counted = dict.fromkeys(
        ("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms", "busy_ms"), 1
    )
    return IoSpan(drive=drive, at=at, seconds=seconds, counts=IoCounts(**counted | changes))


def full_round(known: KnownDrive, at: int = NOON, number: int = 1) -> Round:
    """A round that touches every table that a round can touch; each number gives other content."""
    pass_ = a_pass(
        at,
        a_value(value=number),
        a_value("data-written", 2**70 + number, "bytes"),
        a_value("self-assessment", f"word {number}", "", SignalKind.WORD),
        attributes=(
            Attribute(
                number=197,
                name="Waiting",
                value=100,
                worst=100,
                threshold=0,
                prefail=False,
                raw=str(number),
            ),
        ),
    )
    part = a_part(
        known,
        pass_,
        state=f"state {number}",
        findings=(a_finding(), a_finding(f"fact {number}")),
        evidence={"pending-sectors": float(number), "read-latency": 1.5},
        call=a_call(at=at, reason=f"reason {number}"),
    )
    entry = Entry(at=at, drive=known.number, kind="rise", text=f"entry {number}", data={"n": number})
    return a_round(part, at=at, entries=(entry,))


def keep(history: History, known: KnownDrive, at: int, *values: Value, **part: Any) -> None:
    """Record one pass that read these values."""
    history.record(a_round(a_part(known, a_pass(at, *values), **part), at=at))
