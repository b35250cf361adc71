"""A widget that draws lines made by a function of its width, and redraws only the lines that became others."""

from collections.abc import Callable

from rich.text import Text
from textual import events
from textual.geometry import Region, Size
from textual.widget import Widget

Build = Callable[[int], tuple[Text, ...]]


class Lines(Widget):
    """Lines of text, as many rows as there are lines; without lines it takes no room."""

    DEFAULT_CSS = """
    Lines { height: auto; width: 1fr; text-wrap: nowrap; text-overflow: clip; }
    """

    def __init__(self, build: Build, *, name: str | None = None, id: str | None = None) -> None:  # noqa: A002 - the base class's own name
        """Take the function that makes the lines for a width in columns."""
        super().__init__(name=name, id=id)
        self._build = build
        self._drawn: tuple[Text, ...] = ()

    @property
    def drawn(self) -> tuple[Text, ...]:
        """The lines as they stand on the screen."""
        return self._drawn

    def show(self, build: Build | None = None) -> None:
        """Draw anew what differs from what stands there.

        Args:
            build: another function that makes the lines; None to ask the same again.
        """
        if build is not None:
            self._build = build
        width = self.size.width
        if not self.is_attached or width == 0:
            return
        fresh = self._build(width)
        before, self._drawn = self._drawn, fresh
        if len(fresh) != len(before):
            self.refresh(layout=True)
            return
        changed = [row for row, line in enumerate(fresh) if line != before[row]]

        if changed:
            self.refresh(*(Region(0, row, width, 1) for row in changed))

    def on_resize(self, _event: events.Resize) -> None:
        """Fit the lines to the new width."""
        self.show()

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:  # noqa: ARG002 - the base class's signature
        """One row a line."""
        self._drawn = self._build(width)
        return len(self._drawn)

    def render(self) -> Text:
        """The lines, one under the other."""
        return Text("\n").join(self._drawn)
