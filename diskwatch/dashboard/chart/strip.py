"""A drive as a line through time: a year of evidence, now, and the time left until its first limit. Pure.

Evidence is told by density, on a scale of powers of ten from a month to a hundred years and more: how long a
drive within the norm would be watched until it shows the like. The margin stands as a bracket on two years
ahead.
"""

from itertools import groupby

from rich.text import Text

from diskwatch.dashboard.questions import Strand
from diskwatch.dashboard.weight import Face, weight_of
from diskwatch.records import CallWord, DriveLine
from diskwatch.units import DAY

PAST_DAYS = 365
AHEAD_DAYS = 730
_FLOORS = (30.0, 365.25, 3_652.5, 36_525.0)
"""Evidence in days from which each density on begins: a month, a year, ten, a hundred."""
_DENSITY = "─░▒▓█"
_DENSITY_ASCII = "-.:+#"
_LEAST = 16


def strip(line: DriveLine, strand: Strand, now: int, width: int, face: Face) -> Text:
    """The line through time, exactly ``width`` columns; empty where there is no room.

    Args:
        line: the drive.
        strand: its evidence and its margin.
        now: the current time, UTC seconds since 1970.
        width: columns.
        face: what the terminal can show.
    """
    if width < _LEAST:
        return Text()
    after = width // 4
    before = width - after - 1
    ink = face.paint(weight_of(line).ink)
    text = Text()
    for called, run in groupby(_past(line, strand, now, before, face), key=str.isalpha):
        text.append("".join(run), style="bold reverse" if called else ink)
    text.append("|" if face.ascii_only else "│", style="bold")
    return text.append(_ahead(strand, after, face))


def _past(line: DriveLine, strand: Strand, now: int, width: int, face: Face) -> list[str]:
    """Density by column; a blank before the drive was first seen; the call's first letter where it began."""
    begin = now - PAST_DAYS * DAY
    heights = [-1.0] * width
    step = PAST_DAYS * DAY / width
    for column in range(width):
        if begin + (column + 1) * step > line.first_seen:
            heights[column] = 0.0
    days = [*strand.evidence]
    for number, (day, worth) in enumerate(days):
        until = days[number + 1][0] if number + 1 < len(days) else now // DAY + 1
        first = int((day * DAY - begin) / step)
        last = int((min(until * DAY, now) - begin) / step)
        for column in range(max(first, 0), min(max(last, first + 1), width)):
            heights[column] = max(heights[column], worth)
    letters = _DENSITY_ASCII if face.ascii_only else _DENSITY
    past = [" " if high < 0 else letters[sum(high >= floor for floor in _FLOORS)] for high in heights]
    call = line.call
    if call is not None and call.word is not CallWord.KEEP:
        column = int((call.at - begin) / step)
        if 0 <= column < width:
            past[column] = call.word.value[0]
    return past


def _ahead(strand: Strand, width: int, face: Face) -> str:
    """The margin as a bracket; an open end where it reaches beyond, dots where it is not known."""
    left = strand.margin
    if left.low is None:
        return ("." if face.ascii_only else "·") * width
    bar = "=" if face.ascii_only else "═"
    low = min(int(left.low / AHEAD_DAYS * width), width)
    high = width if left.high is None else min(int(left.high / AHEAD_DAYS * width) + 1, width)
    if low >= width:
        return " " * width
    inner = max(high - low, 1)
    drawn = "[" + bar * (inner - 2) + "]" if inner > 1 else "["
    if high == width and (left.high is None or left.high > AHEAD_DAYS):
        drawn = drawn[:-1] + ">" if inner > 1 else ">"
    return (" " * low + drawn).ljust(width)
