"""The dashboard: a Textual application over one source of drives. Widgets draw; one thread asks the source."""

from collections.abc import Callable
from dataclasses import replace
from typing import ClassVar

from rich.text import Text
from textual import events, work
from textual.app import App, ComposeResult
from textual.message import Message
from textual.theme import Theme

from diskwatch.dashboard import pages
from diskwatch.dashboard.ages import clock
from diskwatch.dashboard.bands import Bands
from diskwatch.dashboard.cells import wrap
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.feed import Feed, Snapshot
from diskwatch.dashboard.head import instead_of_bands
from diskwatch.dashboard.keys import DEEDS, MOVES, PACE, Key, keys_rows
from diskwatch.dashboard.lines import Lines
from diskwatch.dashboard.paper import Paper, bound
from diskwatch.dashboard.questions import Questions, Stage
from diskwatch.dashboard.weight import Face
from diskwatch.dashboard.words import name
from diskwatch.errors import DiskwatchError
from diskwatch.records import Bays
from diskwatch.units import plain

_TWO_ROWS_FROM = 20
_SURE_WITHIN = 6.0
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
        desk: what all screens share.
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
    Input > .input--placeholder, Input > .input--suggestion { color: $primary; }
    Input > .input--cursor { background: $foreground; color: $background; text-style: none; }
    """
    BINDINGS: ClassVar = bound((*MOVES, *DEEDS, *PACE))

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
        braille: bool = True,
        questions: Questions | None = None,
        steady: Callable[[], float] | None = None,
        stage: Stage | None = None,
    ) -> None:
        """Take what the screen stands on; the source is asked from the first frame on.

        Args:
            source: gives the drives at a time, UTC seconds since 1970; may raise `DiskwatchError`. It is asked
                about once a second, always in the same thread, which is not the one that made it.
            now: the clock, UTC seconds since 1970.
            watching: how this screen was opened, one sentence such as "watching from here".
            every: seconds between two passes; what is older than two of them is called old.
            ascii_only: whether the terminal's letters end at ASCII.
            braille: whether its font has Braille patterns.
            questions: who answers what goes beyond the list, in the same thread; None where nobody does.
            steady: seconds that pass for the reader; None where the clock tells them.
            stage: the rehearsal that is shown; None where the drives are real.
        """
        super().__init__()
        self.desk = Desk(
            now,
            questions=questions,
            watching=plain(watching),
            every=every,
            face=Face(ascii_only=ascii_only, braille=braille, colours=not self.no_color),
            steady=now if steady is None else steady,
            stage=stage,
        )
        self._feed = Feed(source, now, None if questions is None else questions.strands)
        self._reply_due = False
        self._doubted: tuple[int, float] | None = None
        self.register_theme(_DARK)
        self.register_theme(_LIGHT)
        self.theme = _DARK.name

    @property
    def snapshot(self) -> Snapshot | None:
        """What the screen shows; None before the source first answered."""
        return self.desk.snapshot

    def compose(self) -> ComposeResult:
        """What is rehearsed, if anything is; top line, troubles, bands or why there are none, keys."""
        yield Lines(self.desk.banner)
        yield Lines(self.desk.top, id="top")
        yield Lines(lambda width: self.desk.notes(width, self.size.height), id="notes")
        yield Lines(self._blank, id="blank")
        yield Bands(self.desk.face)
        yield Lines(self._keys, id="keys")

    def on_mount(self) -> None:
        """Draw what is known, nothing, and begin to ask."""
        self._draw()
        self._ask()
        self.set_interval(1, self.tick)

    def on_unmount(self) -> None:
        """Let the asking thread go; an answer under way is not waited for."""
        self.desk.asker.shutdown(wait=False, cancel_futures=True)

    def on_resize(self, _event: events.Resize) -> None:
        """Fit what depends on the height."""
        self._draw()

    def tick(self) -> None:
        """Let the times pass, and ask again unless an answer is still owed."""
        self._draw()
        self._ask()

    def on_dashboard_fresh(self, message: Fresh) -> None:
        """Show what is new."""
        first = self.desk.snapshot is None
        self.desk.snapshot = message.snapshot
        if first and self.desk.questions is not None:
            # What follows the drives, their lines through time, waits until these are on the screen.
            self.call_after_refresh(self._ask)
        if isinstance(self.screen, Paper):
            self.screen.fresh()
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

    async def action_back(self) -> None:
        """Back to the screen below."""
        if len(self.screen_stack) > 1:
            self.pop_screen()

    def action_why(self) -> None:
        """Open the page of the drive."""
        self._open("why")

    def action_plan(self) -> None:
        """Open its copy plan."""
        self._open("plan")

    def action_ticket(self) -> None:
        """Open its ticket."""
        self._open("ticket")

    def action_day_book(self) -> None:
        """Open the day book: of one drive where a page of it is open, else of all."""
        if self.desk.questions is not None:
            number = self._number if len(self.screen_stack) > 1 else None
            self._push(pages.day_book(self.desk, number))

    def action_palette(self) -> None:
        """Open the list of deeds."""
        self._push(pages.palette(self.desk))

    def action_help(self) -> None:
        """Open the help page."""
        keys = self.screen.KEYS if isinstance(self.screen, Paper) else ()
        self._push(pages.help_page(self.desk, (*keys, *(PACE if self.desk.stage is not None else ()))))

    async def action_take(self, action: str, number: int | None) -> None:
        """Leave the list of deeds and do one of them."""
        await self.action_back()
        if number is not None:
            while len(self.screen_stack) > 1:
                self.pop_screen()
            self._bands.choose(number)
        await self.run_action(action)

    def action_look(self) -> None:
        """Ask the source at once, and say when it has answered."""
        self._reply_due = True
        self._ask()

    def action_light(self) -> None:
        """Change between a light and a dark background."""
        light = self.theme != _LIGHT.name
        self.theme = _LIGHT.name if light else _DARK.name
        self.desk.face = replace(self.desk.face, light=light)
        self._bands.wear(self.desk.face)
        self._draw()

    def action_put_off(self) -> None:
        """Put this user's notices about the drive off, where the key is pressed twice."""
        number = self._number
        line = None if number is None else self.desk.line(number)
        if number is None or line is None or self.desk.questions is None:
            return
        if self._doubted is None or self._doubted[0] != number or self.desk.steady() > self._doubted[1]:
            self._doubted = number, self.desk.steady() + _SURE_WITHIN
            self._say(f"p once more puts the notices about {name(line)} off for a week, for you alone.")
            return
        self._doubted = None
        self._put_off(number)

    def action_slower(self) -> None:
        """Let an invented machine's time pass half as fast."""
        if self.desk.stage is not None:
            self._say(self.desk.stage.slower())

    def action_faster(self) -> None:
        """Let it pass twice as fast."""
        if self.desk.stage is not None:
            self._say(self.desk.stage.faster())

    def action_halt(self) -> None:
        """Let it stand still, or go on."""
        if self.desk.stage is not None:
            self._say(self.desk.stage.halt())

    def action_step(self) -> None:
        """Let one day of it pass."""
        if self.desk.stage is not None:
            self._say(self.desk.stage.step())

    @property
    def _bands(self) -> Bands:
        return self.screen_stack[0].query_one(Bands)

    @property
    def _number(self) -> int | None:
        """The drive that the reader is at: that of the page, else the chosen one."""
        number = getattr(self.screen, "number", None)
        if isinstance(number, int):
            return number
        return None if self._bands.chosen is None else self._bands.chosen.number

    def _open(self, page: str) -> None:
        number = self._number
        if number is not None and self.desk.questions is not None:
            self._push(pages.of_a_drive(page, self.desk, number))

    def _push(self, page: Paper) -> None:
        """Open a page; one of its sort that lies below is left, so that none lies there twice."""
        if type(page) is type(self.screen):
            return
        while any(isinstance(one, type(page)) for one in self.screen_stack[1:]):
            self.pop_screen()
        self.push_screen(page)

    def _say(self, text: str) -> None:
        self.desk.say(plain(text))
        self._draw()

    @work
    async def _put_off(self, number: int) -> None:
        questions, at = self.desk.questions, self.desk.now()
        if questions is None:
            return
        try:
            self._say(await self.desk.ask(lambda: questions.put_off(number, at)))
        except DiskwatchError as error:
            self._say(f"Not put off: {error}")

    def _ask(self) -> None:
        if self.desk.asked_at is None:
            self.desk.asked_at = self.desk.steady()
            self._await_answer()

    @work
    async def _await_answer(self) -> None:
        try:
            snapshot = await self.desk.ask(self._feed.look)
        finally:
            self.desk.asked_at = None
        if snapshot is not None:
            self.post_message(self.Fresh(snapshot))
        if self._reply_due:
            self._reply_due = False
            found = "nothing new" if snapshot is None else "what is new stands above"
            self._say(f"Looked again at {clock(self.desk.now(), seconds=True)}: {found}.")

    def _draw(self) -> None:
        if not self.screen_stack:
            return  # it is being left
        screen = self.screen_stack[0]
        for lines in screen.query(Lines).exclude("Band"):
            lines.show()
        snapshot = self.desk.snapshot
        if snapshot is not None and snapshot.bays is not None:
            self._bands.show(snapshot.bays.drives, self.desk.now(), snapshot.strands)
        else:
            self._bands.show((), self.desk.now())
        if isinstance(self.screen, Paper) and self.screen.is_mounted:
            self.screen.show()

    def _blank(self, width: int) -> tuple[Text, ...]:
        told = instead_of_bands(self.desk.snapshot, self.desk.watching)
        if told is None:
            return ()
        return (Text(), *(Text(f"   {line}") for line in wrap(told, max(width - 6, 10))))

    def _keys(self, width: int) -> tuple[Text, ...]:
        keys: tuple[Key, ...] = (*MOVES, *DEEDS)
        if self.desk.questions is None:
            keys = tuple(key for key in keys if key.action not in _ASKING)
        rows = 2 if self.size.height >= _TWO_ROWS_FROM else 1
        if self.desk.stage is not None:
            keys, rows = (*PACE, *keys), rows + 1
        return self.desk.over(keys_rows(keys, width, self.desk.face, rows=rows), width)


_ASKING = frozenset({"app.why", "app.plan", "app.ticket", "app.put_off", "app.day_book"})
"""Deeds that nobody answers where only the list is known."""
