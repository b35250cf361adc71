"""One drive as a band of lines: what to do, why, and what it is doing now. Pure.

A drive that wants something takes three lines, the third its line through time where that is known; a quiet
one folds to what it is and what it does, two lines, and one where the screen is wide. All lines of a band begin
with the bar of its weight (`diskwatch.dashboard.weight`).
"""

from rich.cells import cell_len
from rich.text import Text

from diskwatch.dashboard.ages import ago, within
from diskwatch.dashboard.cells import column, cut, ends, fit
from diskwatch.dashboard.chart.strip import strip
from diskwatch.dashboard.questions import Strand
from diskwatch.dashboard.rates import traffic
from diskwatch.dashboard.weight import WORD_WIDTH, Face, weight_of
from diskwatch.dashboard.words import cause, device, holdings, kind, name, reason
from diskwatch.records import CallWord, DriveLine, Margin, Outcome
from diskwatch.units import plain, say_bytes, say_days

# A screen of 120 columns leaves 119 beside the scroll bar.
NARROW = 60
"""Below this many columns only the name, the size and the device stand in the first line."""
WIDE = 118
"""From here on kind, cause, amounts in use and the model beside a label are shown too; later also the bay."""
ONE_LINE = 158
"""From here on a quiet drive needs one line only."""
INDENT = 3
"""Columns before the text of the second and later lines: bar, mark of choice, a blank."""

_BAYS = 138
_LONGEST_STRIP = 97
_LONG_AGO = 6 * 3_600
_TRAFFIC_WIDTH = 72
_ENDED = {
    Outcome.READ: "read",
    Outcome.NO_SMART: "no SMART",
    Outcome.ASLEEP: "asleep",
    Outcome.REFUSED: "refused",
    Outcome.NO_TOOL: "no smartctl",
    Outcome.TIMED_OUT: "no answer",
    Outcome.ABSENT: "absent",
    Outcome.GARBLED: "garbled",
}
_PEACEFUL = frozenset({Outcome.READ, Outcome.ASLEEP, Outcome.NO_SMART})


def band(
    line: DriveLine,
    now: int,
    width: int,
    face: Face,
    *,
    chosen: bool = False,
    strand: Strand | None = None,
) -> tuple[Text, ...]:
    """The band of one drive.

    Args:
        line: the drive.
        now: the current time, UTC seconds since 1970.
        width: columns that every line must keep within.
        face: what the terminal can show.
        chosen: whether the reader stands on it.
        strand: its past and what is to be expected; None before that is known.

    Returns:
        One to three lines, none wider than ``width``, free of control characters.
    """
    mark = face.mark
    bar = edge(line, face)
    if is_quiet(line) and width >= ONE_LINE:
        beside = width - _TRAFFIC_WIDTH - 2
        first = _title(line, width, beside, chosen=chosen, bar=bar, mark=mark)
        first.append("  ")
        doing = _doing(line, now, _TRAFFIC_WIDTH, mark, brief=False, strand=strand)
        return (fit(first.append_text(doing), width),)
    title = _title(line, width, width, chosen=chosen, bar=bar, mark=mark)
    inner = max(width - INDENT, 0)
    if is_quiet(line):
        body = [_doing(line, now, inner, mark, brief=width < WIDE, strand=strand)]
    elif strand is None or width < NARROW:
        body = [_why(line, inner, mark), _doing(line, now, inner, mark, brief=width < WIDE)]
    else:
        body = [_why(line, inner, mark), _through_time(line, strand, now, inner, face)]
    indent = Text.assemble(bar, " " * (INDENT - 1))
    return (title, *(fit(Text.assemble(indent, part), width) for part in body))


def is_quiet(line: DriveLine) -> bool:
    """Whether a drive wants nothing: keep, or without SMART, and the last pass met no obstacle."""
    if line.last_pass is None or line.last_pass.outcome not in _PEACEFUL:
        return False
    if line.call is None:
        return line.last_pass.outcome is Outcome.NO_SMART
    return line.call.word is CallWord.KEEP


def edge(line: DriveLine, face: Face) -> Text:
    """The one block that every line of the band begins with."""
    weight = weight_of(line)
    bar = weight.bar_ascii if face.ascii_only else weight.bar
    return Text(bar, style=face.paint(weight.ink))


def _title(line: DriveLine, screen: int, width: int, *, chosen: bool, bar: Text, mark: str) -> Text:
    """The first line, ``width`` columns of a ``screen``; columns stand alike in all bands of one screen."""
    weight = weight_of(line)
    # Reverse needs a blank on either side as its edge; an underline there would look like a word cut off.
    edges = (" ", weight.style) if "reverse" in weight.style else " "
    start = Text.assemble(bar, (">" if chosen else " ", "bold"), edges, (weight.word, weight.style), edges)
    start.append(" " * (WORD_WIDTH + 2 - start.cell_len))
    capacity = line.drive.capacity_bytes
    size = "size ?" if capacity is None else say_bytes(capacity)
    style = "bold underline" if chosen else "bold"
    where = device(line)
    if width < NARROW:
        right = cut(f"{size} {where}", max(width // 2 - 4, 0), mark)
        room = width - start.cell_len - cell_len(right) - 1
        return ends(Text.assemble(start, (cut(name(line), room, mark), style)), Text(right), width)
    roomy = screen >= WIDE
    named = 36 if roomy else width * 28 // 100
    left = Text.assemble(start, (cut(name(line, roomy=roomy), named, mark), style))
    left.append(" " * max(start.cell_len + named + 2 - left.cell_len, 2))
    right = f"{size:>6}  {column(where, max(8, min(cell_len(where), 22)), mark)}"
    if roomy and width == screen:
        right = f"{kind(line):<10}{right}"
        if screen >= _BAYS:
            bay = "" if line.place.bay is None else f"in {plain(line.place.bay)}"
            right = f"{right}  {column(bay, 32, mark)}"
    left.append(holdings(line, width - left.cell_len - cell_len(right) - 2, roomy=roomy))
    return ends(left, Text(right), width)


def _why(line: DriveLine, width: int, mark: str) -> Text:
    """The reason, which goes first; the cause beside it, as much of it as the reason leaves room for."""
    told = reason(line)
    for beside in (cause(line), cause(line).partition(",")[0]):
        if beside and cell_len(told) + len(beside) + 2 <= width:
            return ends(Text(told), Text(beside), width)
    return Text(cut(told, width, mark))


def _doing(
    line: DriveLine, now: int, width: int, mark: str, *, brief: bool, strand: Strand | None = None
) -> Text:
    """Traffic at the left, which gives way; at the right the last pass and, unless it is narrow, the margin."""
    if strand is not None and strand.margin.known:
        margin = f"{_margin(strand.margin)}  "
    else:
        margin = "" if line.call is None or line.call.word is CallWord.KEEP else "margin unknown  "
    right = _passed(line, now, short=brief)
    if width >= NARROW:
        right = margin + right
    right = cut(right, width, mark)
    lefts = traffic(line.traffic)
    for left in lefts:
        if len(left) + len(right) + 2 <= width:
            return ends(Text(left), Text(right), width)
    return ends(Text(cut(lefts[-1], width - len(right) - 2, mark)), Text(right), width)


def _through_time(line: DriveLine, strand: Strand, now: int, width: int, face: Face) -> Text:
    """Past, now, expectation; at the right the margin, where there is room pass and traffic."""
    roomy = width >= WIDE - INDENT
    told = [_margin(strand.margin)]
    if roomy or _is_remarkable(line, now):
        told.append(_passed(line, now, short=not roomy))
    if width >= ONE_LINE - INDENT:
        told.insert(0, traffic(line.traffic)[-1])
    right = "  ".join(told)
    drawn = strip(line, strand, now, min(width - cell_len(right) - 2, _LONGEST_STRIP), face)
    return ends(drawn, Text(right), width)


def _is_remarkable(line: DriveLine, now: int) -> bool:
    """Whether its last pass tells more than the newest of all, which stands in the first line."""
    last = line.last_pass
    return last is None or last.outcome is not Outcome.READ or now - last.at > _LONG_AGO


def _margin(left: Margin) -> str:
    """The time left until the first limit, in a few words."""
    if left.low is None:
        return "margin unknown"
    if left.high == 0:
        return "limit reached"
    if left.high is None:
        return f"margin over {say_days(left.low)}"
    return f"margin {within(left.low, left.high)}"


def _passed(line: DriveLine, now: int, *, short: bool) -> str:
    """How the last pass ended, and when."""
    if line.last_pass is None:
        return "not asked yet"
    if line.last_pass.outcome is Outcome.NO_SMART and is_quiet(line):
        return "watched by its traffic alone"
    return f"{_ENDED[line.last_pass.outcome]} {ago(line.last_pass.at, now, short=short)}"
