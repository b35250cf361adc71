"""Invented drives for the screens: makers, models and serials are made up."""

from dataclasses import replace

from diskwatch.records import (
    Bays,
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

NOW = 1_796_137_200
"""2026-12-01 15:00:00 UTC, a Tuesday."""

TWELVE_MINUTES_AGO = NOW - 720


def span(**counts: int) -> IoSpan:
    """Traffic over ten seconds; what is not given is 0."""
    names = ("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms", "busy_ms")
    return IoSpan(
        drive=1, at=NOW, seconds=10.0, counts=IoCounts(**{name: counts.get(name, 0) for name in names})
    )


def called(word: CallWord, reason: str, cause: Cause | None = None) -> Call:
    """A call that has stood for three days."""
    return Call(
        word=word,
        at=NOW - 3 * 86_400,
        cause=cause,
        cause_probability=None if cause is None else 0.92,
        cause_second=None,
        reason=reason,
        rule="invented-rule",
        evidence=None,
    )


RISE = "Pending sectors rose from 0 to 24 in 9 powered days."

RETIRE = DriveLine(
    number=1,
    drive=Drive(
        identity=Identity(
            wwn="naa.5000c500a0000001", model="INVENTED RX-12000", serial="INV0001", path="/dev/sdb"
        ),
        kind=Kind.HDD,
        firmware="INV1",
        capacity_bytes=12_000_000_000_000,
    ),
    place=Place(
        device="/dev/sdb",
        bay="pci-0000:00:17.0-ata-3",
        lives_here=(Mount(point="/srv/photos", used_bytes=7_200_000_000_000, total_bytes=12_000_000_000_000),),
    ),
    label="Photos",
    first_seen=NOW - 90 * 86_400,
    last_pass=LastPass(at=TWELVE_MINUTES_AGO, outcome=Outcome.READ, explanation=None),
    call=called(CallWord.RETIRE, "The drive's own self-assessment failed on 28 November.", Cause.MEDIA),
    traffic=span(reads=120, writes=30, read_bytes=42_000_000, write_bytes=900_000, read_ms=744, write_ms=60),
)

COPY = replace(
    RETIRE,
    number=2,
    drive=replace(
        RETIRE.drive, identity=Identity(wwn=None, model="INVENTED RX-4000", serial="INV0002", path="/dev/sdc")
    ),
    place=Place(device="/dev/sdc"),
    label=None,
    call=called(CallWord.COPY, RISE, Cause.MEDIA),
    findings=(
        Finding(
            name="drift:media",
            kind=FindingKind.DRIFT,
            signals=("pending-sectors",),
            since=NOW - 3 * 86_400,
            calls=CallWord.COPY,
            cause=Cause.MEDIA,
            evidence=4_000.0,
            sentence=RISE,
        ),
        Finding(
            name="fact:self-test",
            kind=FindingKind.FACT,
            signals=("self-test",),
            since=NOW - 40 * 86_400,
            calls=CallWord.LOOK,
            cause=Cause.MEDIA,
            evidence=None,
            sentence="An extended self-test could not read block 88,211,004.",
        ),
    ),
    traffic=span(),
)

LOOK = replace(
    COPY,
    number=3,
    drive=replace(
        RETIRE.drive,
        kind=Kind.SSD,
        identity=Identity(wwn=None, model="INVENTED Slim", serial="INV0003", path="/dev/sdd"),
    ),
    place=Place(device="/dev/sdd"),
    call=called(CallWord.LOOK, "14 CRC errors in 2 days.", Cause.LINK),
    findings=(),
    traffic=None,
)

UNREAD = replace(
    LOOK,
    number=4,
    drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path="/dev/sde"), kind=Kind.USB),
    place=Place(device="/dev/sde"),
    call=None,
    last_pass=LastPass(
        at=TWELVE_MINUTES_AGO, outcome=Outcome.REFUSED, explanation="Reading /dev/sde needs the right to do so."
    ),
)

KEEP = replace(
    RETIRE,
    number=5,
    drive=Drive(
        identity=Identity(wwn=None, model="INVENTED NV-2000", serial="INV0005", path="/dev/nvme0n1"),
        kind=Kind.NVME,
        capacity_bytes=2_000_000_000_000,
    ),
    place=Place(
        device="/dev/nvme0n1", lives_here=(Mount(point="/boot/efi"), Mount(point="/"), Mount(point="/home"))
    ),
    label=None,
    call=called(CallWord.KEEP, "No signal moved beyond its norm."),
)

VIRTUAL = replace(
    KEEP,
    number=6,
    drive=Drive(
        identity=Identity(wwn=None, model="INVENTED Virtual", serial=None, path="/dev/vda"),
        kind=Kind.VIRTUAL,
        capacity_bytes=40_000_000_000,
    ),
    place=Place(device="/dev/vda"),
    call=None,
    last_pass=LastPass(at=TWELVE_MINUTES_AGO, outcome=Outcome.NO_SMART, explanation="It has no SMART."),
)

ALL = (RETIRE, COPY, LOOK, UNREAD, KEEP, VIRTUAL)


def bays(*drives: DriveLine, watcher: int | None = 1234, trouble: tuple[str, ...] = ()) -> Bays:
    """These drives now."""
    return Bays(at=NOW, watcher=watcher, drives=drives, trouble=trouble)
