"""One record of ``/dev/kmsg``, taken apart (Linux, Documentation/ABI/testing/dev-kmsg). Pure."""

from dataclasses import dataclass

_KERNEL = (
    8  # syslog priorities below this are the kernel's own; whoever else writes there gets another facility
)


@dataclass(frozen=True, slots=True)
class Line:
    """One line of the kernel's log.

    Attributes:
        sequence: its number since the machine booted.
        seconds: when, seconds since the machine booted, time asleep left out.
        text: what it says; what could not be printed stands there as the kernel escaped it.
    """

    sequence: int
    seconds: float
    text: str


def line_of(record: bytes) -> Line | None:
    """A line from a record such as ``3,812,98213311,-;text``, with or without what stands below it.

    Returns:
        None for what is no such record; a line that a program wrote there comes with an empty text, since
        anybody's words must not pass for the kernel's.
    """
    head, mark, rest = record.partition(b";")
    fields = head.split(b",", 3)
    if not mark or len(fields) < 3:
        return None
    try:
        priority, sequence, micros = int(fields[0]), int(fields[1]), int(fields[2])
    except ValueError:
        return None
    if min(priority, sequence, micros) < 0:
        return None
    text = rest.partition(b"\n")[0].decode("utf-8", "replace") if priority < _KERNEL else ""
    return Line(sequence, micros / 1e6, text)
