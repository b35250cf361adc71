"""What the machine's other senses heard of a drive, as sentences: findings, and events for the day book."""

from collections.abc import Mapping

from diskwatch.judge.language import _, marked, ngettext
from diskwatch.records import Event, EventKind
from diskwatch.units import plain, say_count


def counted(signal: str, times: int, last_sector: int | None = None) -> str:
    """A count of what the kernel saw stands above what it was.

    Args:
        signal: which count.
        times: by how much.
        last_sector: of unreadable ones the latest, in sectors of 512 bytes; None where it is not known.
    """
    count = say_count(times)
    if signal == "unreadable-sectors":
        where = _(", last at sector {sector}").format(sector=say_count(last_sector)) if last_sector else ""
        return ngettext(
            "The kernel could not read {count} place of it{where}: back up what matters, and see whether more "
            "follow.",
            "The kernel could not read {count} places of it{where}: back up what matters, and see whether more "
            "follow.",
            times,
        ).format(count=count, where=where)
    one, many = _COUNTED[signal]
    return ngettext(one, many, times).format(count=count)


_COUNTED: Mapping[str, tuple[str, str]] = {
    "failed-writes": (
        marked(
            "The kernel could not write to it {count} time: what should have been stored there is missing; "
            "back up what matters, then see to its cable and power."
        ),
        marked(
            "The kernel could not write to it {count} times: what should have been stored there is missing; "
            "back up what matters, then see to its cable and power."
        ),
    ),
    "dropouts": (
        marked(
            "It dropped out {count} time: it no longer answered, and the kernel gave it up. Back up what "
            "matters, then see to its cable and power; if it goes on, its electronics are the likelier reason."
        ),
        marked(
            "It dropped out {count} times: it no longer answered, and the kernel gave it up. Back up what "
            "matters, then see to its cable and power; if it goes on, its electronics are the likelier reason."
        ),
    ),
    "array-dropouts": (
        marked("An array dropped it or mended what it could not read, {count} time: see to the array."),
        marked("An array dropped it or mended what it could not read, {count} times: see to the array."),
    ),
    "file-system-errors": (
        marked(
            "File systems on it met {count} error. That may come from the drive, its cable, the memory or a "
            "program: back up what matters, then check the file system while it is not in use."
        ),
        marked(
            "File systems on it met {count} errors. That may come from the drive, its cable, the memory or a "
            "program: back up what matters, then check the file system while it is not in use."
        ),
    ),
}


def degraded(arrays: int) -> str:
    """Arrays that the drive belongs to lack a member."""
    return ngettext(
        "{count} array that it belongs to lacks a member: another failure may cost data. Find out which member "
        "is missing, and replace it.",
        "{count} arrays that it belongs to lack a member: another failure may cost data. Find out which "
        "members are missing, and replace them.",
        arrays,
    ).format(count=say_count(arrays))


_HAPPENED: Mapping[EventKind, str] = {
    EventKind.UNREADABLE: marked("A read of {name} failed at sector {sector} ({words})."),
    EventKind.UNWRITABLE: marked("A write to {name} failed at sector {sector} ({words})."),
    EventKind.FAILED: marked("A request to {name} failed ({words})."),
    EventKind.PASSING: marked("A command to {name} failed and went through when it was tried again ({words})."),
    EventKind.LINK_RESET: marked("The link to {name} was reset ({words})."),
    EventKind.LINK_SLOWED: marked("The kernel made the link to {name} slower ({words})."),
    EventKind.TIMED_OUT: marked("A command to {name} was not answered in time ({words})."),
    EventKind.OFFLINED: marked(
        "The kernel gave {name} up ({words}); nothing can be read from it until it is back."
    ),
    EventKind.CONTROLLER_DOWN: marked("The controller of {name} stopped working ({words})."),
    EventKind.NVME: marked("A command to {name} ended with an error ({words})."),
    EventKind.FILE_SYSTEM: marked("A file system on {name} met an error ({words})."),
    EventKind.ARRAY: marked("An array that {name} belongs to met an error of it ({words})."),
}


def happened(event: Event, part: str | None = None, part_sector: int = 0) -> str:
    """One event of the kernel's log, for the day book.

    Args:
        event: what happened.
        part: the partition in which the failing sector lies, or None.
        part_sector: where in it, sectors of 512 bytes from its start.
    """
    sector = _("not told") if event.sector is None else say_count(event.sector)
    words = plain(event.words) or _("no more was told")
    told = _(_HAPPENED[event.kind]).format(name=plain(event.subject), sector=sector, words=words)
    if part is None:
        return told
    where = _("That is sector {sector} of the partition {part}.")
    return f"{told} {where.format(sector=say_count(part_sector), part=plain(part))}"


def more(count: int) -> str:
    """Events of one kind beyond those that the day book tells one by one."""
    return ngettext(
        "{count} more event of the same kind within the hour is counted, but not told one by one.",
        "{count} more events of the same kind within the hour are counted, but not told one by one.",
        count,
    ).format(count=say_count(count))


def lost(lines: int) -> str:
    """Lines of the kernel's log that were overwritten before they could be read."""
    return ngettext(
        "{count} line of the kernel's log was overwritten before it could be read; what it told is not known.",
        "{count} lines of the kernel's log were overwritten before they could be read; what they told is not "
        "known.",
        lines,
    ).format(count=say_count(lines))
