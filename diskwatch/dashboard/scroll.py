"""The thumb of the scroll bar in whole cells: part blocks are missing from console fonts."""

from typing import ClassVar

from textual.scrollbar import ScrollBarRender
from textual.widget import Widget


class PlainThumb(ScrollBarRender):
    """A thumb that begins and ends with a cell."""

    VERTICAL_BARS: ClassVar[list[str]] = [" "] * len(ScrollBarRender.VERTICAL_BARS)


def with_plain_thumb(scrolls: Widget) -> None:
    """Give a widget that scrolls this thumb."""
    # The library offers just this for one widget, but types it as the class's own.
    scrolls.vertical_scrollbar.renderer = PlainThumb  # type: ignore[misc]
