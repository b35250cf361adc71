"""The ticket of one drive: what would be sent, with switches for what is hidden, and a key that writes it."""

from typing import ClassVar

from rich.text import Text
from textual import work

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import HIDES, Key
from diskwatch.dashboard.paper import Paper, bound
from diskwatch.dashboard.title import title
from diskwatch.errors import DiskwatchError
from diskwatch.units import plain

_KINDS = ("serial", "host", "paths")


class TicketScreen(Paper):
    """What a help desk or a warranty desk would be sent."""

    KEYS: ClassVar[tuple[Key, ...]] = HIDES
    BINDINGS: ClassVar = bound(KEYS)

    def __init__(self, desk: Desk, number: int) -> None:
        """Take the drive, by its number in the history."""
        super().__init__(desk)
        self.number = number
        self._hidden: frozenset[str] = frozenset()
        self._text: str | None = None
        self._trouble: str | None = None

    def on_mount(self) -> None:
        """Ask for the ticket."""
        self._ask()

    def action_hide(self, what: str) -> None:
        """Hide one kind of names, or show it again."""
        self._hidden ^= {what}
        self._ask()

    @work(exclusive=True)
    async def action_save(self) -> None:
        """Write it to a file, as it is shown."""
        questions, hidden, at = self.desk.questions, self._hidden, self.desk.now()
        if questions is None:
            return
        try:
            told = await self.desk.ask(lambda: questions.save(self.number, hidden, at))
        except DiskwatchError as error:
            told = f"Not written: {error}"
        self.desk.say(plain(told))
        self.show()

    @work(exclusive=True)
    async def _ask(self) -> None:
        questions, hidden, at = self.desk.questions, self._hidden, self.desk.now()
        if questions is None:
            return
        try:
            self._text = await self.desk.ask(lambda: questions.ticket(self.number, hidden, at))
        except DiskwatchError as error:
            self._trouble = plain(str(error))
        else:
            self._trouble = None
        self.show()

    def page(self, width: int) -> tuple[Text, ...]:
        """Whose ticket it is, what is hidden in it, and its text."""
        lines = [title("Ticket", self.desk.line(self.number), width, self.desk.face)]
        told = ", ".join(f"{kind} {'hidden' if kind in self._hidden else 'shown'}" for kind in _KINDS)
        lines += [
            fit(Text(f"   {part}"), width) for part in wrap(f"{told}. Read it before you send it.", width - 4)
        ]
        lines.append(Text())
        if self._trouble is not None:
            lines += [
                fit(Text(f"   {part}"), width) for part in wrap(f"There is none: {self._trouble}", width - 6)
            ]
        elif self._text is None:
            lines.append(fit(Text("   Asking the history."), width))
        else:
            for row in self._text.splitlines():
                lines += [fit(Text(f" {part}"), width) for part in _broken(plain(row), max(width - 2, 10))]
        return tuple(lines)


def _broken(row: str, width: int) -> list[str]:
    """A row of the page, whose indent is kept where it must be broken."""
    if len(row) <= width:
        return [row]
    indent = " " * min(len(row) - len(row.lstrip()), width // 2)
    return [indent + part for part in wrap(row, max(width - len(indent), 4))]
