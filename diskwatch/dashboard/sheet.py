"""Long pages: lines made by a function of the width, of which only those in sight are laid on the screen."""

from rich.segment import Segment
from rich.style import Style
from rich.text import Text
from textual import events
from textual.geometry import Size
from textual.scroll_view import ScrollView
from textual.strip import Strip

from diskwatch.dashboard.lines import Build
from diskwatch.dashboard.scroll import with_plain_thumb

_NONE = Style()


class Sheet(ScrollView, can_focus=False):
    """A page that scrolls; a redraw touches the lines in sight that became others."""

    DEFAULT_CSS = """
    Sheet { height: 1fr; overflow-x: hidden; overflow-y: auto; scrollbar-size-vertical: 1;
            scrollbar-gutter: stable; }
    """

    def __init__(self, build: Build) -> None:
        """Take the function that makes the lines for a width in columns."""
        super().__init__()
        self._build = build
        self._drawn: tuple[Text, ...] = ()

    @property
    def drawn(self) -> tuple[Text, ...]:
        """The lines of the whole page."""
        return self._drawn

    def show(self) -> None:
        """Make the lines anew, and draw what differs."""
        width = self.scrollable_content_region.width
        if not self.is_attached or width <= 0:
            return
        fresh = self._build(width)
        before, self._drawn = self._drawn, fresh
        if len(fresh) != len(before) or self.virtual_size.width != width:
            self.virtual_size = Size(width, len(fresh))
            self.refresh()
            return
        for row, line in enumerate(fresh):
            if line != before[row]:
                self.refresh_line(row)

    def reveal(self, row: int) -> None:
        """Scroll just so far that a row is seen."""
        height = max(self.size.height, 1)
        if row < self.scroll_offset.y:
            self.scroll_to(y=row, animate=False)
        elif row >= self.scroll_offset.y + height:
            self.scroll_to(y=row - height + 1, animate=False)

    def render_line(self, y: int) -> Strip:
        """One row of the screen."""
        row = y + self.scroll_offset.y
        base = self.rich_style
        width = self.size.width
        if row >= len(self._drawn):
            return Strip.blank(width, base)
        made = self._drawn[row].render(self.app.console)
        strip = Strip([Segment(part.text, base + (part.style or _NONE)) for part in made])
        return strip.adjust_cell_length(width, base)

    def on_mount(self) -> None:
        """Draw the thumb of the scroll bar without part blocks."""
        with_plain_thumb(self)

    def on_resize(self, _event: events.Resize) -> None:
        """Fit the lines to the new width."""
        self.show()
