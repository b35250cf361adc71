"""From lines of the kernel's log to events: one trouble gives one event, however many lines tell of it. Pure.

A bad sector on a SATA disk is some forty-five lines: six attempts with their bits, resets of the link, and at
last one request that failed. What counts is how it ended. So lines about one drive are gathered into a trouble,
which ends when nothing more is said for a while. A request that fails is told at once, by what was said before
it; a trouble that ends without one was a time-out, a reset, or a command that went through at another try.

What has been gathered is plain values, so that a restart goes on in the middle of a trouble.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import islice

from diskwatch.machine.kernel_line import Line
from diskwatch.machine.kernel_texts import Says, Told, told
from diskwatch.records import Event, EventKind

QUIET = 45.0
"""Seconds without a line after which a trouble is over: an attempt may take thirty until it is given up."""

SETTLING = 30.0
"""Seconds after a boot or a sleep in which resets of links are normal (common practice, no source)."""

SAME = 600.0
"""Seconds in which a failure at the same place is the same one: a program may read it again and again."""

SAME_SECTORS = 8
"""512-byte sectors of one page: the kernel reads no less at once."""

_MOST_PLACES = 512
_LET_GO = 64
_MOST_TROUBLES = 256
_LINK_BITS = frozenset({"BadCRC", "10B8B", "Dispar", "LinkSeq", "Handshk", "TrStaTrns", "PHYRdyChg", "DevExch"})
_BUS = frozenset({"ATA bus error", "HSM violation"})
_GONE = frozenset({"DID_NO_CONNECT", "DID_BAD_TARGET", "DID_TRANSPORT_FAILFAST"})
_REQUEST = Says.REQUEST
_OF_DRIVES = frozenset({Says.REQUEST, Says.PAGE_LOST, Says.PAGE_UNREAD})
_OF_A_PORT = frozenset({Says.EXCEPTION, Says.COMMAND_FAILED, Says.RESULT})
_STACKED = re.compile(r"(?:dm-|md|loop|bcache|zd|nbd|drbd|rbd)\d")
_SILENT = frozenset({"DID_TIME_OUT"})


@dataclass(slots=True, kw_only=True)
class Trouble:
    """What has been said of one drive since it was last quiet.

    Attributes:
        began: time of the first line, seconds since the boot.
        last: time of the latest.
        lines: how many.
        subject: the name under which it was told of.
        failed: a command failed, at whatever try.
        resets: how often the link or the controller was reset.
        slowed: the kernel made the link slower; its words.
        link: bits or words told that the way to the drive is at fault.
        medium: the drive said that its medium is.
        silent: a command was not answered in time.
        gone: the kernel gave the drive up, or it is being taken out; what fails after that is no news.
        status: an NVMe status; its words.
        words: the words that tell most so far.
        told: an event has been made of it.
    """

    began: float
    last: float
    subject: str
    lines: int = 0
    failed: bool = False
    resets: int = 0
    slowed: str = ""
    link: bool = False
    medium: bool = False
    silent: bool = False
    gone: bool = False
    status: str = ""
    words: str = ""
    told: bool = False


@dataclass(slots=True, kw_only=True)
class Gathered:
    """All that is kept between lines; plain values.

    Attributes:
        troubles: by drive.
        places: when a failure was last told of, by drive, kind and place.
        port: the drive that a port's lines are about at present, where several hang on it.
        settled: time from which on resets are no longer normal.
        due: time before which no trouble can be over.
        lines: lines seen.
        unknown: lines about drives that the table does not know.
        unplaced: lines that the table knows, about devices that are no drive of ours.
    """

    troubles: dict[str, Trouble] = field(default_factory=dict)
    places: dict[str, float] = field(default_factory=dict)
    port: dict[str, str] = field(default_factory=dict)
    settled: float = SETTLING
    due: float = 0.0
    lines: int = 0
    unknown: int = 0
    unplaced: int = 0


Found = tuple[tuple[str, Event], ...]
"""Events, each with the drive that it happened to."""


def hear(kept: Gathered, line: Line, drives: Mapping[str, tuple[str, ...]]) -> Found:
    """Take in one line.

    Args:
        kept: what was gathered so far; changed.
        line: the line.
        drives: which drives a name of the kernel's stands for (``sda``, ``sda1``, ``ata3``, ``ata3.00``,
            ``2:0:0:0``, ``nvme0``, ``dm-0``).

    Returns:
        What it brings, also of troubles that are over by now.
    """
    kept.lines += 1
    over = settle(kept, line.seconds) if kept.troubles else ()
    say = told(line.text)
    if say is None:
        return over
    says = say.says
    if says is None:
        kept.unknown += 1
        return over
    if says is Says.WOKE:
        kept.settled = line.seconds + SETTLING
        return over
    name = _name(kept, say)
    if says in _OF_DRIVES and _STACKED.match(name):
        # A volume fails where its drive does, or where nothing but the volume is at fault; the drive's own
        # lines tell which.
        return over
    whose = drives.get(name, ())
    if not whose:
        whose = _by_port(kept, name, drives)
    if not whose:
        kept.unplaced += 1
        return over
    if len(whose) == 1:  # nearly always
        found = _taken(kept, whose[0], name, line, say)
        return (*over, *found) if over else found
    return (*over, *(pair for drive in whose for pair in _taken(kept, drive, name, line, say)))


def settle(kept: Gathered, seconds: float) -> Found:
    """End the troubles that nothing was said of for a while.

    Args:
        kept: changed.
        seconds: now, seconds since the boot.
    """
    if seconds < kept.due:
        return ()
    over = [drive for drive, trouble in kept.troubles.items() if seconds - trouble.last >= QUIET]
    found = []
    for drive in over:
        event = _ended(kept.troubles.pop(drive), kept.settled)
        if event is not None:
            found.append((drive, event))
    # New ones begin later, and old ones only last longer: until then nothing need be looked at.
    kept.due = min((trouble.last for trouble in kept.troubles.values()), default=-QUIET) + QUIET
    return tuple(found)


def _name(kept: Gathered, say: Told) -> str:
    parts = say.parts
    name = parts.get("name") or parts.get("address")
    if name is None:
        return kept.port.get("", "")  # the second half of a line in two
    if "." in name and say.says in _OF_A_PORT:
        kept.port[name.partition(".")[0]] = name
        kept.port[""] = name
    return name


def _by_port(kept: Gathered, name: str, drives: Mapping[str, tuple[str, ...]]) -> tuple[str, ...]:
    """A port with several drives: the one that was spoken of last; ``ata3.15`` is the multiplier itself."""
    port = name.partition(".")[0]
    return drives.get(kept.port[port], ()) if port in kept.port else ()


def _taken(kept: Gathered, drive: str, name: str, line: Line, say: Told) -> Found:
    if say.says is Says.FILE_SYSTEM:
        # Nothing of it is said of the drive itself, so it is no part of the drive's own trouble.
        words = say.parts.get("words") or ""
        return _once(kept, drive, _event(EventKind.FILE_SYSTEM, name, line, words=words), place=name)
    trouble = kept.troubles.get(drive)
    if trouble is None:
        if say.says is Says.DETAIL:
            return ()
        if len(kept.troubles) >= _MOST_TROUBLES:
            kept.troubles.pop(next(iter(kept.troubles)))
        trouble = Trouble(began=line.seconds, last=line.seconds, subject=name)
        kept.troubles[drive] = trouble
    trouble.last = line.seconds
    trouble.lines += 1
    if say.says is _REQUEST:
        event = _request(trouble, name, line, say)
    else:
        _noted(trouble, say)
        event = _at_once(trouble, name, line, say)
    if event is None:
        return ()
    trouble.told = True
    place = "" if event.sector is None else str(event.sector // SAME_SECTORS)
    return _once(kept, drive, event, place=place)


def _noted(trouble: Trouble, say: Told) -> None:  # noqa: C901, PLR0912  # a case a line, a table would hide what it does
    parts, words = say.parts, say.parts.get("words") or ""
    match say.says:
        case Says.COMMAND_FAILED:
            trouble.failed = True
            trouble.words = trouble.words or words
        case Says.RESULT:
            trouble.failed = True
            why = parts.get("why") or ""
            trouble.medium |= why == "media error"
            trouble.silent |= why == "timeout"
            trouble.link |= why in _BUS
            trouble.words = why
        case Says.ERROR_BITS:
            bits = words.split()
            trouble.medium |= "UNC" in bits
            trouble.link |= "ICRC" in bits
        case Says.LINK_BITS:
            trouble.link |= not _LINK_BITS.isdisjoint(words.split())
        case Says.RESET:
            trouble.resets += 1
        case Says.STOPPED:
            trouble.gone = True
        case Says.SLOWED:
            trouble.slowed = words
        case Says.SENSE_KEY:
            why = (parts.get("why") or "").strip()
            trouble.failed |= why in {"Medium Error", "Hardware Error", "Aborted Command"}
            trouble.medium |= why == "Medium Error"
            trouble.link |= why == "Aborted Command"
        case Says.SENSE_MORE:
            trouble.words = words.strip()
        case Says.HOST_RESULT:
            trouble.silent |= parts.get("why") in _SILENT
        case Says.NVME_TIMEOUT:
            trouble.silent = True
            trouble.words = words
        case Says.NVME_STATUS:
            trouble.failed = True
            trouble.status = words
            trouble.medium |= parts.get("sct") == "0x2"
        case _:
            pass


def _at_once(trouble: Trouble, name: str, line: Line, say: Told) -> Event | None:
    """The event that a line is by itself, with what was said before it."""
    words = say.parts.get("words") or ""
    match say.says:
        case Says.PAGE_LOST if not trouble.told and not trouble.gone:
            return _event(EventKind.UNWRITABLE, name, line, words="lost page write", lines=trouble.lines)
        case Says.OFFLINED | Says.GIVEN_UP:
            return _gone(trouble, EventKind.OFFLINED, name, line, words)
        case Says.HOST_RESULT if say.parts.get("why") in _GONE:
            return _gone(trouble, EventKind.OFFLINED, name, line, say.parts.get("why") or "")
        case Says.NVME_DOWN:
            return _gone(trouble, EventKind.CONTROLLER_DOWN, name, line, words)
        case Says.ARRAY_DROPPED | Says.ARRAY_MENDED:
            return _event(EventKind.ARRAY, name, line, words=words, lines=trouble.lines)
        case _:
            return None


def _gone(trouble: Trouble, kind: EventKind, name: str, line: Line, words: str) -> Event | None:
    if trouble.gone:
        return None
    trouble.gone = True
    return _event(kind, name, line, words=words, lines=trouble.lines)


def _request(trouble: Trouble, name: str, line: Line, say: Told) -> Event | None:
    """A request that failed for good: what it was, and what was said before it, tell what is at fault."""
    why, operation = say.parts.get("why") or "", say.parts.get("op")
    if trouble.gone:
        return None
    if why == "device offline":
        return _gone(trouble, EventKind.OFFLINED, name, line, why)
    medium = trouble.medium or why == "critical medium"
    sector = int(say.parts.get("sector") or 0)
    words = trouble.status or trouble.words or why
    if not medium and (trouble.silent or why == "timeout"):
        if trouble.told:
            return None
        return _event(EventKind.TIMED_OUT, name, line, sector=sector, words=words, lines=trouble.lines)
    if operation in {"READ", None}:
        # Before the operation was told nothing but reads and writes said more than the place.
        return _event(
            EventKind.UNREADABLE, name, line, sector=sector, medium=medium, words=words, lines=trouble.lines
        )
    if operation in {"WRITE", "WRITE_SAME", "WRITE_ZEROES", "ZONE_APPEND"}:
        return _event(
            EventKind.UNWRITABLE, name, line, sector=sector, medium=medium, words=words, lines=trouble.lines
        )
    return _event(EventKind.FAILED, name, line, words=f"{operation}: {words}", lines=trouble.lines)


def _ended(trouble: Trouble, settled: float) -> Event | None:
    """What a trouble was that ended without a failed request."""
    if trouble.told:
        return None
    kind: EventKind | None = None
    words = trouble.words
    if trouble.silent:
        kind = EventKind.TIMED_OUT
    elif trouble.status:
        kind, words = EventKind.NVME, trouble.status
    elif trouble.medium:
        kind = EventKind.PASSING
    elif trouble.began < settled:
        kind = None
    elif trouble.link or trouble.resets:
        kind = EventKind.LINK_RESET
    elif trouble.slowed:
        kind, words = EventKind.LINK_SLOWED, trouble.slowed
    elif trouble.failed:
        kind = EventKind.PASSING
    if kind is None:
        return None
    return Event(
        kind=kind,
        subject=trouble.subject,
        seconds=trouble.began,
        medium=trouble.medium,
        words=trouble.slowed if kind is EventKind.LINK_RESET and trouble.slowed else words,
        lines=trouble.lines,
    )


def _once(kept: Gathered, drive: str, event: Event, *, place: str) -> Found:
    """The event, unless it was told of the same place a moment ago."""
    key = f"{drive} {event.kind.value} {event.subject} {place}"
    before = kept.places.pop(key, None)
    kept.places[key] = event.seconds
    if len(kept.places) > _MOST_PLACES:
        # Several at once: to find the first of a table whose first places were emptied one by one takes long.
        for old in tuple(islice(kept.places, _LET_GO)):
            del kept.places[old]
    repeated = before is not None and 0 <= event.seconds - before < SAME
    return () if repeated else ((drive, event),)


def _event(
    kind: EventKind,
    name: str,
    line: Line,
    *,
    sector: int | None = None,
    medium: bool = False,
    words: str = "",
    lines: int = 1,
) -> Event:
    return Event(
        kind=kind,
        subject=name,
        seconds=line.seconds,
        sector=sector,
        medium=medium,
        words=words[:200],
        lines=lines,
    )
