"""The dashboard: a Textual application over one source of drives. Widgets draw; one thread asks the source."""

import asyncio
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import ClassVar

from rich.text import Text
from textual import events, work
from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.message import Message
from textual.theme import Theme

from diskwatch.dashboard.ages import clock
from diskwatch.dashboard.bands import Bands
from diskwatch.dashboard.cells import cut, wrap
from diskwatch.dashboard.feed import Feed, Snapshot
from diskwatch.dashboard.head import instead_of_bands, notes, tells_trouble, top_line, troubles
from diskwatch.dashboard.help import Help
from diskwatch.dashboard.keys import DEEDS, MOVES, keys_line
from diskwatch.dashboard.lines import Lines
from diskwatch.dashboard.weight import Face
from diskwatch.records import Bays
from diskwatch.units import plain

_ROWS_A_NOTE = 8
_REPLY_STANDS = 3
# Both draw their own background. A theme of the terminal's own colours becomes black on black under NO_COLOR
# (Textual 8.2.8), and a set pair of colours is readable on light and dark terminals alike.
_DARK = Theme(
    name="diskwatch-dark",
    primary="#c8cdd2",
    foreground="#e8eaec",
    background="#121212",
    surface="#121212",
    boost="#303030",
    dark=True,
)
_LIGHT = Theme(
    name="diskwatch-light",
    primary="#3a4046",
    foreground="#16191c",
    background="#f6f4ee",
    surface="#f6f4ee",
    boost="#e4e0d4",
    dark=False,
)


class Dashboard(App[None]):
    """All drives, worst call first.

    Attributes:
        snapshot: what the screen shows; None before the source first answered.
    """

    TITLE = "diskwatch"
    ENABLE_COMMAND_PALETTE = False
    ALLOW_SELECT: ClassVar[bool] = False
    CSS = """
    Screen { background: $background; color: $foreground; }
    * { link-style: none; link-background: transparent; link-color: $foreground;
        link-style-hover: reverse; link-background-hover: transparent; link-color-hover: $foreground;
        scrollbar-color: $primary 60%; scrollbar-color-hover: $primary; scrollbar-color-active: $primary;
        scrollbar-background: $background; scrollbar-background-hover: $background;
        scrollbar-background-active: $background; }
    """
    BINDINGS: ClassVar = [
        Binding(key.keys, key.action, key.help, show=False, priority="ctrl" in key.keys)
        for key in (*MOVES, *DEEDS)
    ]

    class Fresh(Message):
        """The source told something new."""

        def __init__(self, snapshot: Snapshot) -> None:
            """Carry the snapshot."""
            super().__init__()
            self.snapshot = snapshot

    def __init__(
        self,
        source: Callable[[int], Bays],
        now: Callable[[], int],
        *,
        watching: str,
        every: int,
        ascii_only: bool = False,
    ) -> None:
        """Take what the screen stands on; the source is asked from the first frame on.

        Args:
            source: gives the drives at a time, UTC seconds since 1970; may raise `DiskwatchError`. It is asked
                about once a second, always in the same thread, which is not the one that made it.
            now: the clock, UTC seconds since 1970.
            watching: how this screen was opened, one sentence such as "watching from here".
            every: seconds between two passes; what is older than two of them is called old.
            ascii_only: whether the terminal's letters end at ASCII.
        """
        super().__init__()
        self.snapshot: Snapshot | None = None
        self._feed = Feed(source, now)
        self._clock = now
        self._watching = plain(watching)
        self._every = every
        self._face = Face(ascii_only=ascii_only, colours=not self.no_color)
        self._asked_at: int | None = None
        self._reply_due = False
        self._reply: str | None = None
        self._reply_until = 0
        # One thread, so that a source may hold a connection that belongs to a thread.
        self._asker = ThreadPoolExecutor(max_workers=1, thread_name_prefix="dashboard-feed")
        self.register_theme(_DARK)
        self.register_theme(_LIGHT)
        self.theme = _DARK.name

    def compose(self) -> ComposeResult:
        """Top line, troubles, bands or why there are none, keys."""
        yield Lines(self._top, id="top")
        yield Lines(self._notes, id="notes")
        yield Lines(self._blank, id="blank")
        yield Bands(self._face)
        yield Lines(self._keys, id="keys")

    def on_mount(self) -> None:
        """Draw what is known, nothing, and begin to ask."""
        self._draw()
        self._ask()
        self.set_interval(1, self.tick)

    def on_unmount(self) -> None:
        """Let the asking thread go; an answer under way is not waited for."""
        self._asker.shutdown(wait=False, cancel_futures=True)

    def on_resize(self, _event: events.Resize) -> None:
        """Fit what depends on the height."""
        self._draw()

    def tick(self) -> None:
        """Let the times pass, and ask again unless an answer is still owed."""
        self._draw()
        self._ask()

    def on_dashboard_fresh(self, message: Fresh) -> None:
        """Show what is new."""
        self.snapshot = message.snapshot
        self._draw()

    def action_move(self, by: int) -> None:
        """Go by some drives."""
        self._bands.move(by)

    def action_page(self, by: int) -> None:
        """Go by a screen."""
        self._bands.page(by)

    def action_first(self) -> None:
        """Go to the first drive."""
        self._bands.first()

    def action_last(self) -> None:
        """Go to the last drive."""
        self._bands.last()

    def action_unfold(self) -> None:
        """Unfold the chosen drive, or fold it again."""
        self._bands.unfold()

    def action_look(self) -> None:
        """Ask the source at once, and say when it has answered."""
        self._reply_due = True
        self._ask()

    def action_light(self) -> None:
        """Change between a light and a dark background."""
        self.theme = _DARK.name if self.theme == _LIGHT.name else _LIGHT.name

    def action_help(self) -> None:
        """Open the help page."""
        self.push_screen(Help(self._watching, self._troubles(), self._face))

    @property
    def _bands(self) -> Bands:
        return self.screen_stack[0].query_one(Bands)

    def _ask(self) -> None:
        if self._asked_at is None:
            self._asked_at = self._clock()
            self._await_answer()

    @work
    async def _await_answer(self) -> None:
        try:
            snapshot = await asyncio.get_running_loop().run_in_executor(self._asker, self._feed.look)
        finally:
            self._asked_at = None
        if snapshot is not None:
            self.post_message(self.Fresh(snapshot))
        if self._reply_due:
            self._reply_due = False
            found = "nothing new" if snapshot is None else "what is new stands above"
            self._reply = f"Looked again at {clock(self._clock(), seconds=True)}: {found}."
            self._reply_until = self._clock() + _REPLY_STANDS
            self._draw()

    def _draw(self) -> None:
        screen = self.screen_stack[0]
        for lines in screen.query(Lines).exclude("Band"):
            lines.show()
        bays = self.snapshot.bays if self.snapshot is not None else None
        self._bands.show(bays.drives if bays is not None else (), self._clock())

    def _troubles(self) -> tuple[str, ...]:
        now = self._clock()
        waited = now - self._asked_at if self._asked_at is not None else 0
        return troubles(self.snapshot, now, self._every, waited=waited)

    def _top(self, width: int) -> tuple[Text, ...]:
        return (top_line(self.snapshot, self._watching, self._clock(), width, self._every),)

    def _notes(self, width: int) -> tuple[Text, ...]:
        if self.snapshot is not None and tells_trouble(self.snapshot):
            return ()
        return notes(self._troubles(), width, self._face, most=max(self.size.height // _ROWS_A_NOTE, 1))

    def _blank(self, width: int) -> tuple[Text, ...]:
        told = instead_of_bands(self.snapshot, self._watching)
        if told is None:
            return ()
        return (Text(), *(Text(f"   {line}") for line in wrap(told, max(width - 6, 10))))

    def _keys(self, width: int) -> tuple[Text, ...]:
        if self._reply is not None and self._clock() < self._reply_until:
            return (Text(cut(self._reply, width, self._face.mark)),)
        return (keys_line(width, self._face),)
