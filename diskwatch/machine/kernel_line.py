"""One record of ``/dev/kmsg``, taken apart (Linux, Documentation/ABI/testing/dev-kmsg). Pure."""

import re
from typing import NamedTuple

_RECORD = re.compile(rb"(\d{1,9}),(\d{1,19}),(\d{1,19}),[^;]*;([^\n]*)")
_KERNEL = 8  # priorities below this are the kernel's own; whoever else writes there gets another facility


class Line(NamedTuple):
    """One line of the kernel's log; a tuple, since a flood makes a hundred thousand of them.

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
    found = _RECORD.match(record)
    if found is None:
        return None
    priority, sequence, micros, text = found.groups()
    said = text.decode("utf-8", "replace") if int(priority) < _KERNEL else ""
    return Line(int(sequence), int(micros) / 1e6, said)
