"""Records as rows of the history, and back: the one place that knows both.

Each pair of functions stands in the order of the columns named in its docstring. A row that no version of this
program could have written raises ValueError.
"""

import json
from collections.abc import Mapping
from typing import Any

from diskwatch.language import _
from diskwatch.records import (
    Call,
    CallWord,
    Cause,
    Drive,
    Entry,
    Finding,
    FindingKind,
    Identity,
    IoCounts,
    IoSpan,
    Kind,
    KnownDrive,
    LastPass,
    Mount,
    Outcome,
    Pass,
    Place,
)

Cell = int | float | str | bytes | None
"""What SQLite can keep in one column."""

Row = tuple[Any, ...]
"""A row as SQLite gives it: what its columns hold is checked by the STRICT tables, not by Python's types."""

_DRIVES = 65_536
"""Numbers of drives that fit into a slot of the minutes."""

_SMALLEST, _LARGEST = -(2**63), 2**63 - 1


def text(words: str) -> str:
    """Text as SQLite can keep it: halves of surrogate pairs, which UTF-8 does not know, become escapes."""
    # Nearly all of it is plain, and each round asks hundreds of times.
    return words if words.isascii() else words.encode("utf-8", "backslashreplace").decode("utf-8")


def text_or_none(words: str | None) -> str | None:
    """The same, where there may be nothing."""
    return None if words is None else text(words)


def name_cell(name: str | None) -> str | bytes | None:
    """A name that tells drives apart, kept to the letter: as bytes where UTF-8 cannot carry it.

    Were it changed on the way, its drive would be met as a new one at every start.
    """
    if name is None or text(name) == name:
        return name
    return name.encode("utf-8", "surrogatepass")


def name(kept: str | bytes | None) -> str | None:
    """The name that `name_cell` was given."""
    return kept.decode("utf-8", "surrogatepass") if isinstance(kept, bytes) else kept


def cell(value: int | str | None) -> int | str | bytes | None:
    """A value as its column keeps it; a number beyond 63 bits as its decimal digits in a BLOB."""
    if isinstance(value, str):
        return text(value)
    if value is None or _SMALLEST <= value <= _LARGEST:
        return value
    return str(value).encode("ascii")


def value(kept: Any) -> int | str | None:
    """A value from its column."""
    if isinstance(kept, bytes):
        return int(kept)
    if kept is None or isinstance(kept, int | str):
        return kept
    raise ValueError(f"no whole number or word: {kept!r}")


def number(kept: Any) -> int | None:
    """A whole number from its column."""
    found = value(kept)
    if isinstance(found, str):
        raise ValueError(f"no whole number: {found!r}")  # noqa: TRY004  # the file is wrong, not our caller
    return found


def _json(thing: object) -> str:
    return json.dumps(thing, separators=(",", ":"))


def _object(kept: str) -> dict[str, object]:
    found = json.loads(kept)
    if not isinstance(found, dict):
        raise ValueError(f"no JSON object: {kept[:80]!r}")  # noqa: TRY004  # as above
    return found


def _data(numbers: Mapping[str, object]) -> str:
    return _json(dict(numbers))


def drive_row(drive: Drive, place: Place) -> tuple[Cell, ...]:
    """``wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm, device, bay, lives_here``."""
    who = drive.identity
    return (
        name_cell(who.wwn),
        name_cell(who.model),
        name_cell(who.serial),
        name_cell(who.path),
        drive.kind.value,
        text_or_none(drive.firmware),
        cell(drive.capacity_bytes),
        cell(drive.rotation_rpm),
        text(place.device),
        text_or_none(place.bay),
        _json([[mount.point, mount.used_bytes, mount.total_bytes] for mount in place.lives_here]),
    )


def known_drive(row: Row) -> KnownDrive:
    """From ``number``, the columns of `drive_row`, ``first_seen``."""
    (which, wwn, model, serial, path, kind, firmware, capacity, rotation, device, bay, lives_here, first) = row
    return KnownDrive(
        number=which,
        drive=Drive(
            identity=Identity(wwn=name(wwn), model=name(model), serial=name(serial), path=name(path) or ""),
            kind=Kind(kind),
            firmware=firmware,
            capacity_bytes=number(capacity),
            rotation_rpm=number(rotation),
        ),
        place=Place(
            device=device,
            bay=bay,
            lives_here=mounts(lives_here),
        ),
        first_seen=first,
    )


def mounts(kept: str) -> tuple[Mount, ...]:
    """What lives on a drive, from its column."""
    try:
        return tuple(
            Mount(point=point, used_bytes=used, total_bytes=total) for point, used, total in json.loads(kept)
        )
    except TypeError as error:
        raise ValueError(f"no mount points: {kept[:80]!r}") from error


def last_pass(row: Row) -> LastPass | None:
    """From ``passed_at, outcome, explanation``; None before the first pass."""
    at, outcome, explanation = row
    return None if at is None else LastPass(at=at, outcome=Outcome(outcome), explanation=explanation)


def past_pass(row: Row) -> Pass:
    """From ``at, outcome, exit_bits, took_ms, explanation``; what it read stands in the series."""
    at, outcome, exit_bits, took_ms, explanation = row
    return Pass(at=at, outcome=Outcome(outcome), exit_bits=exit_bits, took_ms=took_ms, explanation=explanation)


def finding_row(finding: Finding) -> tuple[Cell, ...]:
    """``name, kind, signals, since, calls, cause, evidence, sentence, data``."""
    return (
        text(finding.name),
        finding.kind.value,
        _json(finding.signals),
        finding.since,
        None if finding.calls is None else finding.calls.value,
        None if finding.cause is None else finding.cause.value,
        finding.evidence,
        text(finding.sentence),
        _data(finding.data),
    )


def finding(row: Row) -> Finding:
    """From the columns of `finding_row`."""
    name, kind, signals, since, calls, cause, evidence, sentence, data = row
    return Finding(
        name=name,
        kind=FindingKind(kind),
        signals=tuple(json.loads(signals)),
        since=since,
        calls=None if calls is None else CallWord(calls),
        cause=None if cause is None else Cause(cause),
        evidence=evidence,
        sentence=sentence,
        data=_object(data),
    )


def call_row(call: Call) -> tuple[Cell, ...]:
    """``at, word, cause, cause_probability, cause_second, reason, rule, evidence``."""
    return (
        call.at,
        call.word.value,
        None if call.cause is None else call.cause.value,
        call.cause_probability,
        None if call.cause_second is None else call.cause_second.value,
        text(call.reason),
        text(call.rule),
        call.evidence,
    )


def call(row: Row) -> Call:
    """From the columns of `call_row`."""
    at, word, cause, probability, second, reason, rule, evidence = row
    return Call(
        word=CallWord(word),
        at=at,
        cause=None if cause is None else Cause(cause),
        cause_probability=probability,
        cause_second=None if second is None else Cause(second),
        reason=reason,
        rule=rule,
        evidence=evidence,
    )


def entry_row(entry: Entry) -> tuple[Cell, ...]:
    """``at, drive, kind, text, data``."""
    return (entry.at, entry.drive, text(entry.kind), text(entry.text), _data(entry.data))


def entry(row: Row) -> Entry:
    """From the columns of `entry_row`; where the data cannot be right, what happened is told all the same."""
    at, drive, kind, words, data = row
    try:
        told = _object(data)
    except ValueError as error:
        odd = _("{text} (What stands behind this line cannot be read: {why}.)")
        told, words = {}, odd.format(text=words, why=error)
    return Entry(at=at, drive=drive, kind=kind, text=words, data=told)


def span(row: Row) -> IoSpan:
    """From ``drive, at, span_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms``."""
    drive, at, span_ms, *counts = row
    reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms = counts
    return IoSpan(
        drive=drive,
        at=at,
        seconds=span_ms / 1000,
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=read_bytes,
            write_bytes=write_bytes,
            read_ms=read_ms,
            write_ms=write_ms,
            busy_ms=busy_ms,
        ),
    )


def slot(at: int, drive: int = 0, seconds: int = 60) -> int:
    """Where a drive's stretch of time stands among all of that length; without a drive, where it begins.

    Args:
        at: a moment in it, UTC seconds since 1970.
        drive: the drive's number.
        seconds: how long the stretches are.

    Raises:
        ValueError: the drive's number has no room in it.
    """
    if not 0 <= drive < _DRIVES:
        raise ValueError(f"no number of a drive: {drive}")
    return at // seconds * _DRIVES + drive
