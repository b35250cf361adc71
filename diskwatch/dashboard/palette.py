"""Every deed and every drive by its name: type a part, go with Enter."""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

from rich.style import Style
from rich.text import Text
from textual import on
from textual.binding import Binding
from textual.widget import Widget
from textual.widgets import Input

from diskwatch.dashboard.cells import column, fit
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import (
    BACK,
    DAY_BOOK,
    HELP,
    LATER,
    LIGHT,
    LOOK,
    PLAN,
    QUIT,
    TICKET,
    WHY,
    Key,
)
from diskwatch.dashboard.paper import Paper
from diskwatch.dashboard.words import device, name

_HERE = (LOOK, LIGHT, DAY_BOOK, HELP, QUIT)
_OF_A_DRIVE = (WHY, PLAN, TICKET, LATER)


@dataclass(frozen=True, slots=True, kw_only=True)
class Deed:
    """One line of the list.

    Attributes:
        told: what it is called.
        means: what it does, a sentence.
        action: the application's action.
        number: the drive that it is about, by its number in the history; None where it is about none.
    """

    told: str
    means: str
    action: str
    number: int | None = None


class Asked(Input):
    """Where a part of a name is typed; the keys that move go to the list."""

    BINDINGS: ClassVar = [
        Binding("up", "screen.choose(-1)", "up", show=False),
        Binding("down", "screen.choose(1)", "down", show=False),
        Binding("escape", "app.back", "back", show=False),
    ]
    DEFAULT_CSS = """
    Asked, Asked:focus { height: 1; border: none; padding: 0 1; background: $boost; color: $foreground; }
    """


class Palette(Paper):
    """The list of deeds."""

    def __init__(self, desk: Desk) -> None:
        """Take what all screens share."""
        super().__init__(desk)
        self._asked = ""
        self._place = 0

    def between(self) -> Iterable[Widget]:
        """Where a part of a name is typed."""
        yield Asked(placeholder="part of a deed, a drive, a place")

    def on_mount(self) -> None:
        """Type at once."""
        self.query_one(Asked).focus()

    def action_choose(self, by: int) -> None:
        """Go by some deeds."""
        self._place = max(min(self._place + by, len(self.found()) - 1), 0)
        self.show()
        self.sheet.reveal(self._place)

    async def action_take(self, place: int | None = None) -> None:
        """Do one of them; None for the chosen one."""
        if place is not None:
            self._place = place
        await self.take()

    @on(Input.Changed)
    def sift(self, event: Input.Changed) -> None:
        """List what holds all the words typed so far."""
        self._asked = event.value.casefold()
        self._place = 0
        self.sheet.scroll_home(animate=False)
        self.show()

    @on(Input.Submitted)
    async def take(self) -> None:
        """Do what is chosen."""
        found = self.found()
        if found:
            deed = found[min(self._place, len(found) - 1)]
            await self.run_action(f"app.take({deed.action!r}, {deed.number!r})")

    def found(self) -> tuple[Deed, ...]:
        """The deeds that hold every word typed."""
        words = self._asked.split()
        return tuple(deed for deed in self._deeds() if all(word in deed.told.casefold() for word in words))

    def page(self, width: int) -> tuple[Text, ...]:
        """One line a deed."""
        found = self.found()
        if not found:
            return (Text("   Nothing is called so. Delete some letters."),)
        wide = min(max(len(deed.told) for deed in found), max(width // 2, 20))
        lines = []
        for place, deed in enumerate(found):
            chosen = place == self._place
            line = Text.assemble(
                (" > " if chosen else "   ", "bold"),
                (column(deed.told, wide, self.desk.face.mark), "bold" if chosen else ""),
                f"  {deed.means}",
                style=Style(meta={"@click": f"screen.take({place})"}),
            )
            lines.append(fit(line, width))
        return tuple(lines)

    def told_keys(self) -> tuple[Key, ...]:
        """Only what leads through the list and back."""
        return (
            BACK,
            Key(keys="up", face="↑", face_ascii="Up", does="", action="screen.choose(-1)", help=""),
            Key(keys="down", face="↓", face_ascii="Dn", does="choose", action="screen.choose(1)", help=""),
            Key(keys="enter", face="Enter", does="do it", action="screen.take", help="", first=True),
        )

    def _deeds(self) -> Iterable[Deed]:
        for line in self.desk.lines():
            for key in _OF_A_DRIVE:
                told = f"{key.does} of {name(line)} ({device(line)})"
                yield Deed(
                    told=told, means=key.help, action=key.action.removeprefix("app."), number=line.number
                )
        for key in _HERE:
            yield Deed(told=key.does, means=key.help, action=key.action.removeprefix("app."))
