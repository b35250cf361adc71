"""A screen over the bands: one long page that scrolls, the first line above it, its keys below."""

from collections.abc import Iterable
from typing import ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import Screen
from textual.widget import Widget

from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import BACK, DEEDS, HELP, QUIT, SCROLLS, Key, keys_rows
from diskwatch.dashboard.lines import Lines
from diskwatch.dashboard.sheet import Sheet

_TWO_ROWS_FROM = 16


def bound(keys: Iterable[Key]) -> list[BindingType]:
    """Keys as the terminal library binds them."""
    return [Binding(key.keys, key.action, key.help, show=False, priority="ctrl" in key.keys) for key in keys]


class Paper(Screen[None]):
    """The base of all pages; a page says what its lines and its keys are."""

    BINDINGS: ClassVar = bound((*SCROLLS, BACK))
    AUTO_FOCUS = ""
    KEYS: ClassVar[tuple[Key, ...]] = ()

    def __init__(self, desk: Desk) -> None:
        """Take what all screens share."""
        super().__init__()
        self.desk = desk

    def compose(self) -> ComposeResult:
        """What is rehearsed, if anything is; first line, troubles, the page, keys."""
        yield Lines(self.desk.banner)
        yield Lines(self.desk.top)
        yield Lines(lambda width: self.desk.notes(width, self.size.height))
        yield from self.between()
        yield Sheet(self.page)
        yield Lines(self._keys)

    def between(self) -> Iterable[Widget]:
        """What stands between the troubles and the page."""
        return ()

    def page(self, width: int) -> tuple[Text, ...]:
        """The lines of the page for a width in columns."""
        raise NotImplementedError

    def fresh(self) -> None:
        """Something new is known of the drives."""

    def show(self) -> None:
        """Draw what became another."""
        for lines in self.query(Lines):
            lines.show()
        self.sheet.show()

    def on_screen_resume(self) -> None:
        """Draw what changed while another screen lay over this one."""
        self.show()

    @property
    def sheet(self) -> Sheet:
        """The page's widget."""
        return self.query_one(Sheet)

    def action_scroll(self, where: str) -> None:
        """Scroll the page: ``up``, ``down``, ``page_up``, ``page_down``, ``home`` or ``end``."""
        moves = {
            "up": self.sheet.scroll_up,
            "down": self.sheet.scroll_down,
            "page_up": self.sheet.scroll_page_up,
            "page_down": self.sheet.scroll_page_down,
            "home": self.sheet.scroll_home,
            "end": self.sheet.scroll_end,
        }
        moves[where](animate=False)

    def told_keys(self) -> tuple[Key, ...]:
        """The keys that its last lines tell."""
        others = tuple(key for key in DEEDS if key not in {HELP, QUIT} and key.keys in _ALSO)
        return (BACK, *SCROLLS, *self.KEYS, *others, HELP, QUIT)

    def _keys(self, width: int) -> tuple[Text, ...]:
        rows = 2 if self.size.height >= _TWO_ROWS_FROM else 1
        return self.desk.over(keys_rows(self.told_keys(), width, self.desk.face, rows=rows), width)


_ALSO = frozenset({"c", "t", "p", "b"})
"""Deeds that the pages about one drive tell as well."""
