"""The day book: what happened to the drives, newest first, all of it or what is asked for."""

from collections.abc import Iterable
from typing import ClassVar

from rich.text import Text
from textual import on, work
from textual.binding import Binding
from textual.widget import Widget
from textual.widgets import Input

from diskwatch.dashboard.cells import cut, fit, wrap
from diskwatch.dashboard.daybook import entry_lines
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import SIEVE, Key
from diskwatch.dashboard.paper import Paper, bound
from diskwatch.dashboard.words import name
from diskwatch.errors import DiskwatchError
from diskwatch.records import Entry
from diskwatch.units import plain, say_count

MOST = 2_000
"""So many of the newest are read; 'diskwatch daybook' has all."""

KINDS = (
    "call",
    "kernel",
    "rise",
    "drift",
    "reset",
    "pass",
    "first-seen",
    "moved",
    "settled",
    "ended",
    "watch",
    "trouble",
)


class Words(Input):
    """Where words are typed that an entry must hold; Escape and Enter lead back to the page."""

    BINDINGS: ClassVar = [Binding("escape", "screen.forget_search", "all again", show=False)]
    DEFAULT_CSS = """
    Words, Words:focus { height: 1; border: none; padding: 0 1; background: $boost; color: $foreground; }
    """


class DayBookScreen(Paper):
    """What happened."""

    KEYS: ClassVar[tuple[Key, ...]] = SIEVE
    BINDINGS: ClassVar = bound(KEYS)

    def __init__(self, desk: Desk, number: int | None = None) -> None:
        """Take the drive that it is to be about first, by its number in the history; None for all."""
        super().__init__(desk)
        self.number = number
        self._kind: str | None = None
        self._words = ""
        self._entries: tuple[Entry, ...] | None = None
        self._trouble: str | None = None
        self._made: tuple[object, tuple[Text, ...]] | None = None

    def between(self) -> Iterable[Widget]:
        """The line for searching, as long as it is wanted."""
        words = Words(placeholder="words that it must hold", select_on_focus=False)
        words.display = False
        yield words

    def on_mount(self) -> None:
        """Ask for the entries."""
        self.fresh()

    def fresh(self) -> None:
        """Something may have happened."""
        self._ask()

    def action_next_drive(self) -> None:
        """Only the next drive, after the last one all again."""
        numbers = [None, *(line.number for line in self.desk.lines())]
        place = numbers.index(self.number) if self.number in numbers else 0
        self.number = numbers[(place + 1) % len(numbers)]
        self._ask()

    def action_next_kind(self) -> None:
        """Only the next kind, after the last one all again."""
        kinds = (None, *KINDS)
        self._kind = kinds[(kinds.index(self._kind) + 1) % len(kinds)]
        self._ask()

    def action_search(self) -> None:
        """Type words."""
        words = self.query_one(Words)
        words.display = True
        words.focus()

    def end_search(self, *, keep: bool) -> None:
        """Back to the page, with what was typed or without."""
        words = self.query_one(Words)
        if not keep:
            words.value = ""
        words.display = bool(words.value)
        self.set_focus(None)

    def action_forget_search(self) -> None:
        """Show all again."""
        self.end_search(keep=False)

    @on(Input.Changed)
    def sift(self, event: Input.Changed) -> None:
        """Show what holds the words typed so far."""
        self._words = event.value.casefold()
        self.sheet.scroll_home(animate=False)
        self.show()

    @on(Input.Submitted)
    def read(self) -> None:
        """Read what was found."""
        self.end_search(keep=True)

    @work(exclusive=True)
    async def _ask(self) -> None:
        questions, kinds = self.desk.questions, None if self._kind is None else (self._kind,)
        if questions is None:
            return
        try:
            self._entries = await self.desk.ask(lambda: questions.day_book(self.number, kinds, MOST))
        except DiskwatchError as error:
            self._trouble = plain(str(error))
        else:
            self._trouble = None
        self.show()

    def page(self, width: int) -> tuple[Text, ...]:
        """What is shown of what there is, then the entries."""
        # Two thousand entries are broken into lines again only where something of them became another.
        key = (width, self._entries, self._words, self.number, self._kind, self._trouble, self.desk.face)
        if self._made is None or self._made[0] != key:
            self._made = (key, tuple(self._lines(width)))
        return self._made[1]

    def _lines(self, width: int) -> Iterable[Text]:
        yield Text(cut(f" Day book: {self._about()}", width, self.desk.face.mark), style="bold")
        yield Text()
        if self._trouble is not None:
            yield from (Text(f"   {part}") for part in wrap(self._trouble, max(width - 6, 10)))
        if self._entries is None:
            yield fit(Text("   Asking the history."), width)
            return
        found = [entry for entry in self._entries if self._words in plain(entry.text).casefold()]
        if not found:
            yield from (Text(f"   {part}") for part in wrap(self._empty(), max(width - 6, 10)))
        names = {line.number: name(line) for line in self.desk.lines()}
        yield from entry_lines(tuple(reversed(found)), names, width)
        if len(self._entries) >= MOST:
            told = (
                f"Older ones are not shown here: 'diskwatch daybook' lists all beyond these {say_count(MOST)}."
            )
            yield Text()
            yield from (Text(f"   {part}") for part in wrap(told, max(width - 6, 10)))

    def _about(self) -> str:
        line = None if self.number is None else self.desk.line(self.number)
        who = "all drives" if line is None else f"only {name(line)}"
        kind = "every kind" if self._kind is None else f"only {self._kind}"
        words = f", holding {plain(self._words)!r}" if self._words else ""
        return f"{who}, {kind}{words}; newest first"

    def _empty(self) -> str:
        if self._entries or self.number is not None or self._kind is not None or self._words:
            return "Nothing of this sort has been written down. Press d, k or / for something else."
        return "Nothing has happened yet that was written down. It begins with the first pass: diskwatch watch."
