"""What counters count, for a person who has never heard of SMART, with the trade's term in brackets."""

from collections.abc import Mapping

from diskwatch.judge.language import _, marked, marked_plural, ngettext
from diskwatch.units import say_count

_NAMES: Mapping[str, tuple[str, str]] = {
    "reallocated-sectors": marked_plural(
        "sector replaced by a spare one (reallocated)",
        "sectors replaced by spare ones (reallocated)",
    ),
    "pending-sectors": marked_plural(
        "sector that could not be read and waits (pending)",
        "sectors that could not be read and wait (pending)",
    ),
    "offline-uncorrectable": marked_plural(
        "sector that its own scan could not read (offline uncorrectable)",
        "sectors that its own scan could not read (offline uncorrectable)",
    ),
    "reported-uncorrectable": marked_plural(
        "read that it gave up (reported uncorrectable)",
        "reads that it gave up (reported uncorrectable)",
    ),
    "grown-defects": marked_plural(
        "defect grown in use (grown defects)", "defects grown in use (grown defects)"
    ),
    "uncorrected-reads": marked_plural(
        "read that it gave up (uncorrected)", "reads that it gave up (uncorrected)"
    ),
    "uncorrected-writes": marked_plural(
        "write that it gave up (uncorrected)", "writes that it gave up (uncorrected)"
    ),
    "media-errors": marked_plural(
        "time that stored data could not be recovered (media errors)",
        "times that stored data could not be recovered (media errors)",
    ),
    "crc-errors": marked_plural(
        "transfer damaged on the cable or connector (interface CRC errors)",
        "transfers damaged on the cable or connector (interface CRC errors)",
    ),
    "link-resets": marked_plural("reset of the link to it", "resets of the link to it"),
    "command-timeouts": marked_plural(
        "command that it did not answer in time (command timeouts)",
        "commands that it did not answer in time (command timeouts)",
    ),
    "kernel-io-errors": marked_plural("request that the kernel saw fail", "requests that the kernel saw fail"),
    "kernel-timeouts": marked_plural(
        "command that the kernel saw unanswered in time", "commands that the kernel saw unanswered in time"
    ),
    "unreadable-sectors": marked_plural(
        "place that the kernel could not read", "places that the kernel could not read"
    ),
    "failed-writes": marked_plural("write that the kernel saw fail", "writes that the kernel saw fail"),
    "dropouts": marked_plural("time that the kernel gave it up", "times that the kernel gave it up"),
    "file-system-errors": marked_plural(
        "error that a file system on it met", "errors that file systems on it met"
    ),
    "array-dropouts": marked_plural(
        "time that an array dropped or mended it", "times that an array dropped or mended it"
    ),
    "media-episodes": marked_plural("occasion with new bad spots", "occasions with new bad spots"),
    "flash-media-episodes": marked_plural(
        "occasion on which stored data was not recovered", "occasions on which stored data was not recovered"
    ),
    "late-reads": marked_plural("read of the probe that came late", "reads of the probe that came late"),
    "unsafe-power-offs": marked_plural(
        "time that power went away without notice (unsafe power-offs)",
        "times that power went away without notice (unsafe power-offs)",
    ),
}

_STREAMS: Mapping[str, str] = {
    "media": marked("New bad spots turned up"),
    "flash-media": marked("Stored data could not be recovered"),
    "link": marked("Transfers were damaged on the way between drive and computer"),
    "timeouts": marked("Commands went unanswered"),
    "power": marked("Power went away without notice"),
    "kernel-errors": marked("Requests failed"),
}


def signal_name(signal: str, count: int = 2) -> str:
    """What a counter counts, for a person, and the trade's term; in the singular for a count of 1."""
    one, many = _NAMES.get(signal, (signal.replace("-", " "),) * 2)
    return ngettext(one, many, count)


def happened(stream: str) -> str:
    """What happens when a stream's counters rise, as the beginning of a sentence."""
    return _(_STREAMS[stream])


def counted(values: Mapping[str, int]) -> str:
    """Counts with their names, in a row."""
    return ", ".join(f"{say_count(count)} {signal_name(signal, count)}" for signal, count in values.items())


def begun(text: str) -> str:
    """A text as the beginning of a sentence."""
    return text[:1].upper() + text[1:]
