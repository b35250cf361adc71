"""One signal through time: what was read, its usual range, the line through it, what is to be expected. Pure.

Every part has letters of its own, so that nothing is lost without colour: dots for what was read, ``░``
between the ends of a forecast, a row of dashes for a limit, dots far apart for the usual range and
the fitted line, a bar for now. Where nothing was read there are no dots, and the axis below is broken.
"""

from collections.abc import Iterator
from dataclasses import dataclass, field
from datetime import UTC, datetime, tzinfo
from itertools import groupby

from rich.text import Text

from diskwatch.dashboard.ages import within
from diskwatch.dashboard.cells import cut, ends, fit
from diskwatch.dashboard.chart.dates import date_marks
from diskwatch.dashboard.chart.raster import Dots, Raster
from diskwatch.dashboard.chart.scale import Scale, scale_of
from diskwatch.dashboard.chart.values import say_mark, say_value
from diskwatch.dashboard.questions import Ahead, Curve
from diskwatch.dashboard.weight import BLUE, Face
from diskwatch.units import DAY, say_days

LEAST_ROWS = 3
_GUTTER = 8
"""Columns for the values at the left, with the bar behind them."""
_LEAST_WIDTH = 24
_AHEAD_SHARE = 0.3
"""Part of the width that what is to come gets, where something is known of it."""
_FARTHEST = 730.0
"""Days ahead that are shown at most."""
_FAR_LIMIT = 20.0
"""A limit so many times farther away than anything read would press all that was read into one row."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Letters:
    """What the parts are drawn with."""

    now: str
    limit: str
    fan: str
    faint: str
    axis: str
    corner: str


_FULL = _Letters(now="│", limit="─", fan="░", faint="·", axis="─", corner="└")
_ASCII = _Letters(now="|", limit="-", fan="/", faint=".", axis="-", corner="+")


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """What a picture shows of time, and how large it is.

    Attributes:
        since: its left end, UTC seconds since 1970.
        now: where the past ends.
        width: columns that every line must keep within.
        rows: rows of the plane, without heading and axis.
        face: what the terminal can show.
        zone: the zone of the dates; None for the host's own.
    """

    since: int
    now: int
    width: int
    rows: int
    face: Face
    zone: tzinfo | None = field(default=None)


def plot(curve: Curve, frame: Frame) -> tuple[Text, ...]:
    """The picture of one signal: a heading, the plane, an axis with dates.

    Args:
        curve: the signal.
        frame: what is shown, and how large.
    """
    head = _heading(curve, frame)
    if frame.width < _LEAST_WIDTH or frame.rows < LEAST_ROWS:
        return (head,)
    if not curve.points:
        return (head, fit(Text(f"   {_nothing(curve)}"), frame.width))
    return (head, *_Plane(curve, frame).lines())


def _heading(curve: Curve, frame: Frame) -> Text:
    value = "not known" if curve.now is None else say_value(curve.now, curve.unit)
    ahead = _said_ahead(curve.ahead)
    right = Text(ahead if len(ahead) < frame.width // 2 else "")
    room = max(frame.width - len(right) - 2, 4)
    words = cut(curve.words, max(room - len(value) - 3, 8), frame.face.mark)
    return ends(Text(cut(f" {words}: {value}", room, frame.face.mark), style="bold"), right, frame.width)


def _said_ahead(ahead: Ahead | None) -> str:
    if ahead is None:
        return ""
    if ahead.high == 0:
        return f"limit {ahead.limit:g} reached"
    when = f"{say_days(ahead.low)} or later" if ahead.high is None else within(ahead.low, ahead.high)
    return f"limit {ahead.limit:g} in {when}"


def _nothing(curve: Curve) -> str:
    if isinstance(curve.now, str):
        return "It is told in words, which no picture shows."
    return "Nothing was read of it within this span."


class _Plane:
    """The plane with its two stretches: what was, and what is to be expected."""

    def __init__(self, curve: Curve, frame: Frame) -> None:
        self.curve, self.frame = curve, frame
        self.letters = _ASCII if frame.face.ascii_only else _FULL
        self.dots = frame.face.dots
        plane = frame.width - _GUTTER
        ahead = curve.ahead
        self.after = int(plane * _AHEAD_SHARE) if ahead is not None and ahead.high != 0 else 0
        self.before = plane - self.after - 1
        self.span = max(frame.now - frame.since, 1)
        self.farthest = 0.0 if ahead is None else min(ahead.high or max(ahead.low * 2, 30.0), _FARTHEST)
        self.scale = self._scale()

    def lines(self) -> Iterator[Text]:
        data, fitted = self._data(), self._fitted()
        marks = self._marks()
        usual = self._usual_rows()
        limit = self._limit_row()
        ink = self.frame.face.paint(BLUE)
        for row in range(self.frame.rows):
            line = Text(f"{marks.get(row, ''):>{_GUTTER - 2}} {self.letters.now}")
            seen = [data.letter(column, row) for column in range(self.before)]
            cells = [
                letter or self._behind(column, row, fitted, usual, limit) for column, letter in enumerate(seen)
            ]
            # One style a run of cells, not one a cell: over a slow link each change of style costs bytes.
            for drawn, run in groupby(zip(seen, cells, strict=True), key=lambda pair: bool(pair[0])):
                line.append("".join(cell for _, cell in run), style=ink if drawn else "")
            line.append(self.letters.now, style="bold")
            line.append("".join(self._expected(column, row, limit) for column in range(self.after)))
            yield line
        yield self._axis()
        yield self._dates()

    def _scale(self) -> Scale:
        values = [value for _, value in self.curve.points]
        if self.curve.usual is not None:
            values += self.curve.usual
        ahead = self.curve.ahead
        if ahead is not None:
            reach = max(values) - min(values) + 1
            if self.after or abs(ahead.limit - values[-1]) <= _FAR_LIMIT * reach:
                values.append(ahead.limit)
        return scale_of(values, whole=self.curve.held)

    def _data(self) -> Raster:
        raster = Raster(self.before, self.frame.rows, self.dots)
        points = self.curve.points
        last: int | None = None
        for number, (at, value) in enumerate(points):
            start = max(self._x(at, raster), 0)
            until = points[number + 1][0] if number + 1 < len(points) else self.frame.now
            end = min(self._x(until, raster), raster.wide - 1)
            y = self._y(value, raster)
            if last is not None and not self._silent(start, raster):
                raster.upright(start, last, y)
            for x in range(start, end + 1):
                if not self._silent(x, raster):
                    raster.dot(x, y)
            last = y
        return raster

    def _fitted(self) -> Raster:
        raster = Raster(self.before, self.frame.rows, self.dots)
        if self.curve.fit is None:
            return raster
        (begin, low), (end, high) = self.curve.fit
        for x in range(max(self._x(begin, raster), 0), raster.wide, 3 * self.dots.across):
            at = self.frame.since + x / raster.wide * self.span
            raster.dot(x, self._y(low + (high - low) * (at - begin) / max(end - begin, 1), raster))
        return raster

    def _silent(self, x: int, raster: Raster) -> bool:
        """Whether nothing was read in all the time that a column of dots stands for."""
        begin = self.frame.since + x / raster.wide * self.span
        end = self.frame.since + (x + 1) / raster.wide * self.span
        return any(since <= begin and end <= until for since, until in self.curve.gaps)

    def _x(self, at: int, raster: Raster) -> int:
        return int((at - self.frame.since) / self.span * raster.wide)

    def _y(self, value: float, raster: Raster) -> int:
        return round((1 - self.scale.share(value)) * (raster.high - 1))

    def _row(self, value: float) -> int:
        return round((1 - self.scale.share(value)) * (self.frame.rows - 1))

    def _marks(self) -> dict[int, str]:
        marks: dict[int, str] = {}
        for value in self.scale.marks(max(self.frame.rows - 1, 2)):
            marks.setdefault(self._row(value), say_mark(value, self.curve.unit))
        return marks

    def _usual_rows(self) -> frozenset[int]:
        usual = self.curve.usual
        return frozenset() if usual is None or self.curve.held else frozenset(map(self._row, usual))

    def _limit_row(self) -> int | None:
        ahead = self.curve.ahead
        if ahead is None or not 0 <= self.scale.share(ahead.limit) <= 1:
            return None
        return self._row(ahead.limit)

    def _behind(self, column: int, row: int, fitted: Raster, usual: frozenset[int], limit: int | None) -> str:
        if row == limit:
            return self.letters.limit
        if fitted.letter(column, row):
            return fitted.letter(column, row)
        return self.letters.faint if row in usual and column % 3 == 0 else " "

    def _expected(self, column: int, row: int, limit: int | None) -> str:
        """What may be in a cell right of now: between the soonest path to the limit and the latest."""
        ahead = self.curve.ahead
        if ahead is None:
            return " "
        day = (column + 0.5) / self.after * self.farthest
        here = self.curve.points[-1][1]
        soonest = min(day / ahead.low, 1.0) if ahead.low else 1.0
        latest = 0.0 if ahead.high is None else min(day / ahead.high, 1.0)
        ways = sorted(self._row(here + (ahead.limit - here) * share) for share in (soonest, latest))
        if ways[0] <= row <= ways[1]:
            return self.letters.fan
        return self.letters.limit if row == limit else " "

    def _axis(self) -> Text:
        """The line below, broken where nothing was read."""
        raster = Raster(self.before, 1, Dots.ASCII)
        line = Text(" " * (_GUTTER - 1) + self.letters.corner)
        line.append(
            "".join(" " if self._silent(column, raster) else self.letters.axis for column in range(self.before))
        )
        line.append(self.letters.now if not self.frame.face.ascii_only else "+", style="bold")
        return line.append(self.letters.axis * self.after)

    def _dates(self) -> Text:
        """Dates below the axis, now, and the far end of what is shown."""
        cells = [" "] * (self.before + 1 + self.after)
        marks = date_marks(self.frame.since, self.frame.now, self.before - 4, self.frame.zone)
        for at, text in marks:
            column = int((at - self.frame.since) / self.span * self.before)
            _write(cells, column, text, until=self.before - 2)
        _write(cells, self.before - (2 if not self.after else 1), "now", until=len(cells))
        if self.after:
            end = datetime.fromtimestamp(self.frame.now + self.farthest * DAY, UTC).astimezone(self.frame.zone)
            text = f"{end.day} {end:%b}" if self.farthest < 200 else f"{end:%b %Y}"
            _write(cells, len(cells) - len(text), text, until=len(cells))
        return Text(" " * _GUTTER + "".join(cells).rstrip())


def _write(cells: list[str], column: int, text: str, *, until: int) -> None:
    """Put a text in place where it is free, with a blank on either side."""
    begin, end = max(column, 0), column + len(text)
    if end > until or any(cell != " " for cell in cells[max(begin - 1, 0) : end + 1]):
        return
    cells[begin:end] = text
