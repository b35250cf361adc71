"""The list of bands: one widget a drive, one of them chosen, any of them unfolded."""

from collections.abc import Mapping

from rich.text import Text
from textual import events
from textual.containers import VerticalScroll

from diskwatch.dashboard.band import band
from diskwatch.dashboard.lines import Build, Lines
from diskwatch.dashboard.questions import Strand
from diskwatch.dashboard.scroll import with_plain_thumb
from diskwatch.dashboard.unfold import unfolded
from diskwatch.dashboard.weight import Face
from diskwatch.records import DriveLine


class Band(Lines):
    """One drive's band."""

    DEFAULT_CSS = """
    Band.chosen { background: $boost; }
    """

    def __init__(self, place: int, build: Build) -> None:
        """Make the band that stands at a place in the list, counted from 0."""
        super().__init__(build)
        self.place = place

    def on_click(self, event: events.Click) -> None:
        """Go to this drive; unfold it where the reader stands on it already."""
        event.stop()
        if isinstance(self.parent, Bands):
            self.parent.pick(self.place)


class Bands(VerticalScroll, can_focus=False):
    """All bands. It scrolls so that the chosen one is seen; drives are remembered by number, not by place."""

    DEFAULT_CSS = """
    Bands { height: 1fr; scrollbar-size-vertical: 1; scrollbar-gutter: stable; }
    Bands.roomy Band { margin-top: 1; }
    """

    def __init__(self, face: Face) -> None:
        """Make an empty list."""
        super().__init__()
        self._face = face
        self._drives: tuple[DriveLine, ...] = ()
        self._now = 0
        self._chosen: int | None = None
        self._place = 0
        self._open: set[int] = set()
        self._strands: Mapping[int, Strand] = {}
        self._made: dict[int, tuple[object, tuple[Text, ...], object]] = {}

    @property
    def chosen(self) -> DriveLine | None:
        """The drive that the reader stands on; None where there is none."""
        return self._drives[self._place] if self._drives else None

    def wear(self, face: Face) -> None:
        """Take another face from the next drawing on."""
        self._face = face

    def show(
        self, drives: tuple[DriveLine, ...], now: int, strands: Mapping[int, Strand] | None = None
    ) -> None:
        """Show these drives in this order, with their lines through time as far as known.

        The reader stays on the same drive wherever it moves in the order; where it has gone, on the same place.
        """
        self._drives, self._now = drives, now
        if strands is not None:
            self._strands = strands
        numbers = [line.number for line in drives]
        if self._chosen in numbers:
            self._place = numbers.index(self._chosen)
        self._place = max(min(self._place, len(drives) - 1), 0)
        self._chosen = numbers[self._place] if numbers else None
        bands = list(self.query_children(Band))
        for surplus in bands[len(drives) :]:
            surplus.remove()
        for widget in bands[: len(drives)]:
            widget.show(self._builder(widget.place))
        fresh = [Band(place, self._builder(place)) for place in range(len(bands), len(drives))]
        for widget in [*bands[: len(drives)], *fresh]:
            widget.set_class(widget.place == self._place, "chosen")
        # Before the mounting, so that no frame is drawn in the other spacing.
        self._spread()
        if fresh:
            self.mount_all(fresh)

    def move(self, by: int) -> None:
        """Go ``by`` drives down, or up where negative."""
        self._go(self._place + by)

    def page(self, by: int) -> None:
        """Go by as many drives as the screen shows whole, at least one."""
        shown = sum(self.region.contains_region(widget.region) for widget in self.query_children(Band))
        self._go(self._place + by * max(shown, 1))

    def first(self) -> None:
        """Go to the first drive."""
        self._go(0)

    def last(self) -> None:
        """Go to the last drive."""
        self._go(len(self._drives) - 1)

    def unfold(self) -> None:
        """Unfold the chosen drive, or fold it again."""
        if self._chosen is None:
            return
        self._open ^= {self._chosen}
        self.show(self._drives, self._now)
        self.call_after_refresh(self._reveal)

    def choose(self, number: int) -> None:
        """Go to a drive by its number in the history, where it is among them."""
        for place, line in enumerate(self._drives):
            if line.number == number:
                self._go(place)

    def pick(self, place: int) -> None:
        """Go to the drive at a place; unfold it where the reader stands there already."""
        if place == self._place:
            self.unfold()
        else:
            self._go(place)

    def on_mount(self) -> None:
        """Draw the thumb of the scroll bar without part blocks."""
        with_plain_thumb(self)

    def on_resize(self, _event: events.Resize) -> None:
        """Keep the chosen drive in sight, and blank lines only where there is room for all."""
        self._spread()
        self.call_after_refresh(self._reveal)

    def _go(self, place: int) -> None:
        if not self._drives:
            return
        self._place = max(min(place, len(self._drives) - 1), 0)
        self._chosen = self._drives[self._place].number
        self.show(self._drives, self._now)
        self._reveal()

    def _builder(self, place: int) -> Build:
        line, chosen = self._drives[place], place == self._place
        return lambda width: self._lines(line, width, chosen=chosen)

    def _lines(self, line: DriveLine, width: int, *, chosen: bool) -> tuple[Text, ...]:
        strand = self._strands.get(line.number)
        key = (id(line), id(strand), self._now, width, chosen, line.number in self._open, self._face)
        made = self._made.get(line.number)
        # Widths are tried and rows counted several times for one drawing; records are frozen, so that the same
        # record gives the same lines. What it knows by place is kept, so that no other takes the place.
        if made is not None and made[0] == key:
            return made[1]
        lines = band(line, self._now, width, self._face, chosen=chosen, strand=strand)
        if line.number in self._open:
            lines += unfolded(line, self._now, width, self._face)
        self._made[line.number] = (key, lines, (line, strand))
        return lines

    def _spread(self) -> None:
        width = self.scrollable_content_region.width
        if width <= 0:
            return
        rows = sum(len(self._lines(line, width, chosen=line.number == self._chosen)) for line in self._drives)
        self.set_class(rows + len(self._drives) <= self.size.height, "roomy")

    def _reveal(self) -> None:
        for widget in self.query_children(Band):
            if widget.place == self._place:
                self.scroll_to_widget(widget, animate=False)
