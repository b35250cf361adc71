"""One drive: its band, one signal large, all its signals, why it is called so and what would change that."""

from typing import ClassVar

from rich.text import Text
from textual import work

from diskwatch.dashboard.band import band
from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.chapters import chapter_lines
from diskwatch.dashboard.chart.plot import LEAST_ROWS, Frame, plot
from diskwatch.dashboard.curves import curve_head, curve_rows
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import SIGNALS, SPANS, Key
from diskwatch.dashboard.paper import Paper, bound
from diskwatch.dashboard.questions import Chapter, Curve
from diskwatch.dashboard.spans import begin_of, said
from diskwatch.dashboard.unfold import unfolded
from diskwatch.errors import DiskwatchError
from diskwatch.records import DriveLine
from diskwatch.units import plain

_TALL = 34


class DriveScreen(Paper):
    """All about one drive."""

    KEYS: ClassVar[tuple[Key, ...]] = (*SIGNALS, *SPANS)
    BINDINGS: ClassVar = bound(KEYS)

    def __init__(self, desk: Desk, number: int) -> None:
        """Take the drive, by its number in the history."""
        super().__init__(desk)
        self.number = number
        self._span = "month"
        self._signal: str | None = None
        self._why: tuple[Chapter, ...] | None = None
        self._curves: tuple[Curve, ...] = ()
        self._since = 0
        self._at = 0
        self._trouble: str | None = None
        self._seen: object = None

    def on_mount(self) -> None:
        """Ask for what is not known yet."""
        self.fresh()

    def fresh(self) -> None:
        """Ask again where the drive was read or called anew."""
        line = self.desk.line(self.number)
        seen = None if line is None else (line.last_pass, line.call, line.findings, line.forecasts)
        if seen != self._seen:
            self._seen = seen
            self._ask()

    def action_span(self, span: str) -> None:
        """Show another span of time."""
        self._span = span
        self._ask()

    def action_signal(self, by: int) -> None:
        """Show another signal large."""
        if self._curves:
            place = (self._chosen() + by) % len(self._curves)
            self._signal = self._curves[place].signal
            self.show()

    @work(exclusive=True)
    async def _ask(self) -> None:
        line, questions, at, span = (
            self.desk.line(self.number),
            self.desk.questions,
            self.desk.now(),
            self._span,
        )
        if line is None or questions is None:
            return
        since = begin_of(span, line.first_seen, at)
        try:
            curves = await self.desk.ask(lambda: questions.curves(self.number, since, at))
            why = await self.desk.ask(lambda: questions.why(self.number, at))
        except DiskwatchError as error:
            self._trouble = plain(str(error))
        else:
            self._trouble, self._curves, self._why = None, curves, why
            self._since, self._at = since, at
        self.show()

    def page(self, width: int) -> tuple[Text, ...]:
        """Band, whole reason, picture, signals, chapters."""
        line = self.desk.line(self.number)
        if line is None:
            return (Text(" This drive is not among those that the history knows any more."),)
        face = self.desk.face
        lines = list(band(line, self.desk.now(), width, face, strand=self.desk.strand(self.number)))
        lines += self._told(line, width)
        if self._trouble is not None:
            lines += [Text(), *(Text(f"   {part}") for part in wrap(self._trouble, max(width - 6, 10)))]
        if self._why is None:
            return (
                (*lines, Text(), fit(Text("   Asking the history."), width))
                if self._trouble is None
                else tuple(lines)
            )
        lines.append(Text())
        if self._curves:
            lines += plot(self._curves[self._chosen()], self._frame(width))
            lines += [Text(), curve_head(f"Signals, {said(self._span)}", width, face)]
            lines += curve_rows(
                self._curves, self._chosen(), since=self._since, now=self._at, width=width, face=face
            )
        else:
            lines += [fit(Text(f"   {part}"), width) for part in wrap(_no_signals(line), max(width - 6, 10))]
        return (
            *lines,
            Text(),
            *chapter_lines(self._why[1:], width),
            Text(),
            *unfolded(line, self.desk.now(), width, face),
        )

    def _told(self, line: DriveLine, width: int) -> list[Text]:
        """The whole reason where the band had no room for it, and by when to do what."""
        if line.call is None:
            return []
        above = band(line, self.desk.now(), width, self.desk.face)
        told = self._why[0].lines if self._why else (line.call.reason,)
        fresh = [plain(one) for one in told if not any(plain(one) in row.plain for row in above)]
        return [
            fit(Text.assemble("   ", (part, "bold")), width)
            for one in fresh
            for part in wrap(one, max(width - 5, 10))
        ]

    def _frame(self, width: int) -> Frame:
        height = self.size.height
        rows = 12 if height >= _TALL else 6 if height >= 20 else LEAST_ROWS
        return Frame(since=self._since, now=self._at, width=width, rows=rows, face=self.desk.face)

    def _chosen(self) -> int:
        names = [curve.signal for curve in self._curves]
        return names.index(self._signal) if self._signal in names else 0


def _no_signals(line: DriveLine) -> str:
    if line.last_pass is None:
        return "It has not been asked yet, so no signal of it is known."
    why = line.last_pass.explanation
    return "No signal of it is known." + ("" if why is None else f" {plain(why)}")
