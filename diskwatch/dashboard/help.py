"""The help page: what the four calls mean, what to mind when a drive fails, every key, every trouble."""

from typing import ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import VerticalScroll
from textual.screen import Screen

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.keys import DEEDS, MOVES
from diskwatch.dashboard.lines import Lines
from diskwatch.dashboard.scroll import with_plain_thumb
from diskwatch.dashboard.weight import Face

_CALLS = (
    ("keep", "Go on using it. Keep a backup all the same."),
    ("look", "Something wants a hand: a cable, heat, load or a first defect. Watch it closer."),
    ("copy", "Copy the data off now, then replace the drive by the date given."),
    ("retire", "Stop relying on it. Take it out of service."),
    ("unread", "It has not been read, so nothing is known. Mind it like a look."),
    ("no SMART", "It cannot tell of itself. Only its traffic is watched."),
)
# Common practice, no source.
_CAUTIONS = (
    "Back up first, before any test, repair or update.",
    "Stop writing to a drive that fails, and copy what matters most first.",
    "Do not switch a failing drive off and on, and do not open it.",
    "Leave recovery to professionals where the data are worth much: every attempt of your own may cost some.",
    "The maker's warranty terms hold. Read them before you do anything to the drive.",
    "No tool can promise that a drive will not fail. Many drives fail without a sign in any counter.",
)
_FIGURES = (
    ("reads 12/s 1.4 MB/s 6 ms", "Requests a second, bytes a second, and how long one read took in the mean."),
    ("margin", "The time left until a limit is reached. Unknown where too little has been seen to say."),
    ("read 12 minutes ago", "When the last pass over the drive ended, and how."),
)


def help_lines(watching: str, troubles: tuple[str, ...], width: int, face: Face) -> tuple[Text, ...]:
    """The page as lines.

    Args:
        watching: how the screen was opened, one harmless sentence.
        troubles: what is wrong with the watch now, harmless sentences.
        width: columns that every line must keep within.
        face: what the terminal can show.
    """
    lines: list[Text] = []
    if troubles:
        lines += _part("What is wrong now", [("!", text) for text in troubles], width)
    lines += _part("What to do with a drive", _CALLS, width)
    lines += _part("When a drive fails", [("-", text) for text in _CAUTIONS], width)
    lines += _part("What stands in a band", _FIGURES, width)
    faces = [((key.face_ascii if face.ascii_only else key.face), key.help) for key in (*MOVES, *DEEDS)]
    lines += _part("Keys", faces, width)
    lines += _part(
        "This screen", [("-", f"It was opened like this: {watching}. It reads the history only.")], width
    )
    return tuple(lines[:-1])


def _part(title: str, rows: list[tuple[str, str]] | tuple[tuple[str, str], ...], width: int) -> list[Text]:
    widest = max(len(word) for word, _ in rows)
    # A word in the margin wider than a third of the screen would squeeze the text: it gets a line of its own.
    beside = widest <= max(width // 3, 1)
    indent = widest + 3 if beside else 3
    lines = [fit(Text(title, style="bold underline"), width)]
    for word, text in rows:
        if not beside:
            lines.append(fit(Text.assemble(" ", (word, "bold")), width))
        for number, part in enumerate(wrap(text, max(width - indent, 10))):
            lead = word if beside and number == 0 else ""
            lines.append(fit(Text.assemble(" ", (lead, "bold"), " " * (indent - 1 - len(lead)), part), width))
    return [*lines, Text()]


class Help(Screen[None]):
    """The help page over the bands; the same key, or Escape, leads back."""

    BINDINGS: ClassVar = [
        Binding("question_mark,escape", "app.pop_screen", "back", show=False),
        Binding("up", "scroll('up')", "up", show=False),
        Binding("down", "scroll('down')", "down", show=False),
        Binding("pageup", "scroll('page_up')", "page up", show=False),
        Binding("pagedown,space", "scroll('page_down')", "page down", show=False),
        Binding("home", "scroll('home')", "first", show=False),
        Binding("end", "scroll('end')", "last", show=False),
    ]
    DEFAULT_CSS = """
    Help VerticalScroll { height: 1fr; scrollbar-size-vertical: 1; scrollbar-gutter: stable; }
    """

    def __init__(self, watching: str, troubles: tuple[str, ...], face: Face) -> None:
        """Take what the page tells of this very screen."""
        super().__init__()
        self._watching = watching
        self._troubles = troubles
        self._face = face

    def compose(self) -> ComposeResult:
        """The text, and the keys that lead back."""
        with VerticalScroll(can_focus=False) as scroll:
            with_plain_thumb(scroll)
            yield Lines(self._page, id="page")
        yield Lines(_way_back, id="keys")

    def action_scroll(self, where: str) -> None:
        """Scroll the page: ``up``, ``down``, ``page_up``, ``page_down``, ``home`` or ``end``."""
        scroll = self.query_one(VerticalScroll)
        moves = {
            "up": scroll.scroll_up,
            "down": scroll.scroll_down,
            "page_up": scroll.scroll_page_up,
            "page_down": scroll.scroll_page_down,
            "home": scroll.scroll_home,
            "end": scroll.scroll_end,
        }
        moves[where](animate=False)

    def _page(self, width: int) -> tuple[Text, ...]:
        return help_lines(self._watching, self._troubles, width, self._face)


def _way_back(width: int) -> tuple[Text, ...]:
    back, read, leave = ("? Esc", " back"), ("Up Down PgUp PgDn Home End", " read"), ("q", " quit")
    for keys in ((back, read, leave), (back, leave)):
        line = Text("  ").join(Text.assemble((key, "bold"), does) for key, does in keys)
        if line.cell_len <= width:
            break
    return (fit(line, width),)
