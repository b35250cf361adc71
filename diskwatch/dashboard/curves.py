"""The list of a drive's signals: value, usual range, evidence, and a small line through time each. Pure."""

from rich.text import Text

from diskwatch.dashboard.cells import column, fit
from diskwatch.dashboard.chart.values import say_mark, say_value
from diskwatch.dashboard.questions import Curve
from diskwatch.dashboard.weight import BLUE, Face
from diskwatch.units import once_in

_STEPS = "▁▂▃▄▅▆▇█"
_STEPS_ASCII = "_.-=*#"
_WIDE = 110
_WITH_LINE = 72
_LEAST_LINE = 10
_YEAR = 365.25


def curve_rows(
    curves: tuple[Curve, ...], chosen: int, *, since: int, now: int, width: int, face: Face
) -> tuple[Text, ...]:
    """One row a signal.

    Args:
        curves: the signals.
        chosen: the place of the one that is shown large.
        since: where their lines begin, UTC seconds since 1970.
        now: where they end.
        width: columns that every row must keep within.
        face: what the terminal can show.
    """
    mark = face.mark
    names = _names(width)
    rows = []
    for place, curve in enumerate(curves):
        value = "not known" if curve.now is None else say_value(curve.now, curve.unit)
        row = Text.assemble(
            (" > " if place == chosen else "   ", "bold"),
            (column(curve.words, names, mark), "bold" if place == chosen else ""),
            "  ",
            column(value, 16, mark),
        )
        if width >= _WITH_LINE:
            row.append("  " + column(_usual(curve), 16 if width < _WIDE else 18, mark))
        if width >= _WIDE:
            row.append("  " + column(_evidence(curve), 20, mark))
        room = width - row.cell_len - 3
        if room >= _LEAST_LINE:
            row.append("  ")
            row.append(small_line(curve, since, now, room, face), style=face.paint(BLUE))
        rows.append(fit(row, width))
    return tuple(rows)


def curve_head(told: str, width: int, face: Face) -> Text:
    """What stands above the rows: what they show, and what each column is.

    Args:
        told: what they show, harmless.
        width: columns that it must keep within.
        face: what the terminal can show.
    """
    row = Text.assemble(
        (column(f" {told}", _names(width) + 3, face.mark), "bold underline"), "  ", column("now", 16, face.mark)
    )
    if width >= _WITH_LINE:
        row.append("  " + column("moved, or usual", 16 if width < _WIDE else 18, face.mark))
    if width >= _WIDE:
        row.append("  " + column("within the norm", 20, face.mark))
    return fit(row, width)


def _names(width: int) -> int:
    return max(12, width * 34 // 100) if width < _WIDE else 40


def _usual(curve: Curve) -> str:
    if curve.usual is None:
        return _moved(curve)
    low, high = curve.usual
    if low == high:
        return f"usual {say_value(low, curve.unit)}"
    return f"usual {low:g} to {say_value(high, curve.unit)}" if curve.unit not in {"bytes", "hours"} else ""


def _moved(curve: Curve) -> str:
    """By how much it moved within what is shown; where it began there unread, nothing is said."""
    if len(curve.points) < 2:
        return "as it was" if curve.points else ""
    by = curve.points[-1][1] - curve.points[0][1]
    if by == 0:
        return "as it was"
    amount = say_mark(abs(by), curve.unit)
    return f"{'up' if by > 0 else 'down'} {amount}"


def _evidence(curve: Curve) -> str:
    """How rarely a drive within the norm would come to this; below a year that tells nothing yet."""
    return "" if curve.evidence is None or curve.evidence < _YEAR else once_in(curve.evidence)


def small_line(curve: Curve, since: int, now: int, width: int, face: Face) -> str:
    """A signal in one row: the highest value of each column, a blank where nothing was read.

    Args:
        curve: the signal.
        since: where the line begins, UTC seconds since 1970.
        now: where it ends.
        width: columns.
        face: what the terminal can show.
    """
    if not curve.points:
        return ""
    step = max(now - since, 1) / width
    high: list[float | None] = [None] * width
    for number, (at, value) in enumerate(curve.points):
        until = curve.points[number + 1][0] if number + 1 < len(curve.points) else now
        first = min(max(int((at - since) / step), 0), width - 1)
        for place in range(first, min(max(int((until - since) / step), first + 1), width)):
            before = high[place]
            high[place] = value if before is None else max(before, value)
    for begin, end in curve.gaps:
        for place in range(max(int((begin - since) / step) + 1, 0), min(int((end - since) / step), width)):
            high[place] = None
    values = [value for _, value in curve.points]
    low, reach = min(values), max(values) - min(values)
    letters = _STEPS_ASCII if face.ascii_only else _STEPS if face.braille else "_▄█"
    top = len(letters) - 1
    return "".join(
        " " if value is None else letters[0 if reach == 0 else round((value - low) / reach * top)]
        for value in high
    )
