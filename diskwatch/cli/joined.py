"""Several machines' drives in one list: what each of them saved of its own ``bays --json``.

A file comes from outside: it may be cut short, of another program or written to do harm. It is looked through
before anything of it is shown, and everything shown is escaped.
"""

import json
import textwrap
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NoReturn

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.records import CallWord
from diskwatch.units import epoch_of, plain, say_bytes, say_span

SCHEMA = "diskwatch/bays/1"
_LARGEST = 64 << 20
_TEXTS = ("serial", "model", "device", "bay", "label", "reason")
_UNKNOWN: Mapping[str, Any] = {
    **dict.fromkeys(_TEXTS),
    "call": None,
    "capacity_bytes": None,
    "last_pass": None,
    "lives_here": [],
}
_INDENT = " " * 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Saved:
    """What one machine said of its drives.

    Attributes:
        machine: what it is called: by its own word, else by the name of the file.
        at: when it said so, UTC seconds since 1970.
        watched: whether somebody was watching then.
        drives: as ``bays --json`` prints them.
        file: the file that says so; None for this machine.
    """

    machine: str
    at: int
    watched: bool
    drives: tuple[Mapping[str, Any], ...]
    file: str | None


def saved(path: Path) -> Saved:
    """Read what a machine saved.

    Raises:
        UsageError: it is no output of ``bays --json``; says what is wrong with it.
        DiskwatchError: it cannot be read.
    """
    try:
        with path.open("rb") as file:
            raw = file.read(_LARGEST + 1)
    except OSError as error:
        raise DiskwatchError(f"{plain(str(path))} cannot be read: {error.strerror}") from error
    try:
        if len(raw) > _LARGEST:
            raise ValueError("it is larger than 64 MiB")  # noqa: TRY301  # told as all others
        return _looked_through(json.loads(raw, parse_constant=_no_number), path)
    except (ValueError, RecursionError) as error:
        raise UsageError(
            f"{plain(str(path))} is no list of drives: {plain(str(error))[:200]}",
            hint="save one with 'diskwatch bays --json' on that machine",
        ) from error


def here(answer: Mapping[str, Any], at: int) -> Saved:
    """This machine's own answer.

    Args:
        answer: what ``bays --json`` prints.
        at: now, UTC seconds since 1970.
    """
    return Saved(
        machine=answer["machine"],
        at=at,
        watched=bool(answer["watched"]),
        drives=tuple(answer["drives"]),
        file=None,
    )


def worst_first(every: Sequence[Saved]) -> list[tuple[Saved, Mapping[str, Any]]]:
    """All drives of all machines, worst call first, then by machine; each machine's own order stays."""
    drives = [(one, drive) for one in every for drive in one.drives]
    return sorted(drives, key=lambda found: (-rank(found[1]), found[0].machine.casefold()))


def rank(drive: Mapping[str, Any]) -> int:
    """Rank of a drive's call; one that was never read counts as look."""
    word = drive["call"]
    return CallWord.LOOK.rank if word is None else CallWord(word).rank


def joined_answer(answer: Mapping[str, Any], every: Sequence[Saved], now: int) -> dict[str, object]:
    """What ``bays --json --join`` prints: this machine's answer, with the drives of all."""
    return {
        **answer,
        "drives": [{**drive, "machine": _machine(one, drive)} for one, drive in worst_first(every)],
        "joined": [
            {
                "machine": one.machine,
                "file": one.file,
                "watched": one.watched,
                "seconds_old": max(0, now - one.at),
            }
            for one in every
        ],
    }


def joined_lines(every: Sequence[Saved], now: int, width: int) -> Iterator[str]:
    """The list for a person, at most so many columns wide."""
    drives = sum(len(one.drives) for one in every)
    yield f"{drives} {'drive' if drives == 1 else 'drives'}, {len(every)} machines."
    for one in every:
        watched = "watched" if one.watched else "NOBODY IS WATCHING"
        when = "now" if one.file is None else f"saved {say_span(max(0, now - one.at))} ago in {one.file}"
        yield from textwrap.wrap(
            plain(f"{one.machine}: {watched}, {when}"), max(20, width), subsequent_indent=_INDENT
        )
    for one, drive in worst_first(every):
        yield ""
        yield from _band(one, drive, now, width)


def _band(one: Saved, drive: Mapping[str, Any], now: int, width: int) -> Iterator[str]:
    name = drive["label"] or drive["model"] or drive["device"]
    size = None if drive["capacity_bytes"] is None else say_bytes(int(drive["capacity_bytes"]))
    serial = f"serial {drive['serial']}" if drive["serial"] else None
    holds = f"holds {', '.join(drive['lives_here'])}" if drive["lives_here"] else None
    about = [f"{_machine(one, drive)}: {name}", size, serial, drive["device"], drive["bay"], holds]
    head = f"{drive['call'] or '-':<7} {', '.join(part for part in about if part)}"
    yield from textwrap.wrap(plain(head), max(20, width), subsequent_indent=_INDENT)
    told = [drive["reason"]] if drive["reason"] else []
    if drive["last_pass"] is not None:
        ago = say_span(max(0, now - epoch_of(drive["last_pass"]["at"])))
        told.append(f"Last pass {ago} ago: {drive['last_pass']['outcome']}.")
    for part in textwrap.wrap(plain(" ".join(told)), max(20, width - len(_INDENT))):
        yield _INDENT + part


def _machine(one: Saved, drive: Mapping[str, Any]) -> str:
    """A saved list may itself have been joined: then each of its drives names its machine."""
    named = drive.get("machine")
    return named if isinstance(named, str) and named else one.machine


def _no_number(text: str) -> NoReturn:
    raise ValueError(f"it holds {text}, which is no number")


def _looked_through(found: Any, path: Path) -> Saved:
    if not isinstance(found, dict) or found.get("schema") != SCHEMA:
        raise ValueError(f"its schema is not {SCHEMA}")
    machine, drives = found.get("machine"), found.get("drives")
    if not isinstance(drives, list):
        raise ValueError("it has no list of drives")  # noqa: TRY004  # the file is wrong, not our caller
    return Saved(
        machine=machine if isinstance(machine, str) and machine else path.stem,
        at=_time(found.get("at")),
        watched=found.get("watched") is True,
        drives=tuple(_drive(drive, number) for number, drive in enumerate(drives, 1)),
        file=str(path),
    )


def _drive(drive: Any, number: int) -> Mapping[str, Any]:
    if not isinstance(drive, dict):
        raise ValueError(f"drive {number} is no object")  # noqa: TRY004  # likewise
    held = {**_UNKNOWN, **drive}
    for name in _TEXTS:
        if held[name] is not None and not isinstance(held[name], str):
            raise ValueError(f"{name} of drive {number} is no text")
    if held["call"] is not None and held["call"] not in [word.value for word in CallWord]:
        raise ValueError(f"the call of drive {number} is none of {', '.join(CallWord)}")
    if not _is_size(held["capacity_bytes"]):
        raise ValueError(f"capacity_bytes of drive {number} is no whole number")
    points = held["lives_here"]
    if not isinstance(points, list) or not all(isinstance(point, str) for point in points):
        raise ValueError(f"lives_here of drive {number} is no list of texts")
    last = held["last_pass"]
    if last is not None:
        if not isinstance(last, dict) or not isinstance(last.get("outcome"), str):
            raise ValueError(f"last_pass of drive {number} has no outcome")
        _time(last.get("at"))
    return held


def _is_size(size: Any) -> bool:
    """Whole numbers beyond 2^53 are written as texts."""
    digits = isinstance(size, str) and size.isascii() and size.isdecimal() and len(size) <= 40
    return size is None or digits or (isinstance(size, int) and not isinstance(size, bool) and size >= 0)


def _time(text: Any) -> int:
    if not isinstance(text, str):
        raise ValueError("a time is missing")  # noqa: TRY004  # likewise
    try:
        return epoch_of(text)
    except (ValueError, OverflowError) as error:
        raise ValueError(f"{text[:40]} is no time") from error
