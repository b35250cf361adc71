"""The copy plan of one drive: what is at stake, and how to get it off."""

from rich.text import Text
from textual import work

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.chapters import chapter_lines
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.paper import Paper
from diskwatch.dashboard.questions import Chapter
from diskwatch.dashboard.title import title
from diskwatch.errors import DiskwatchError
from diskwatch.units import plain


class PlanScreen(Paper):
    """What a person who copies a drive off needs, in the order of need."""

    def __init__(self, desk: Desk, number: int) -> None:
        """Take the drive, by its number in the history."""
        super().__init__(desk)
        self.number = number
        self._plan: tuple[Chapter, ...] | None = None
        self._trouble: str | None = None

    def on_mount(self) -> None:
        """Ask for the plan."""
        self._ask()

    @work(exclusive=True)
    async def _ask(self) -> None:
        questions, at = self.desk.questions, self.desk.now()
        if questions is None:
            return
        try:
            self._plan = await self.desk.ask(lambda: questions.plan(self.number, at))
        except DiskwatchError as error:
            self._trouble = plain(str(error))
        self.show()

    def page(self, width: int) -> tuple[Text, ...]:
        """Whose plan it is, and its chapters."""
        head = title("Copy plan", self.desk.line(self.number), width, self.desk.face)
        if self._trouble is not None:
            told = wrap(f"There is no plan: {self._trouble}", max(width - 6, 10))
            return (head, Text(), *(fit(Text(f"   {part}"), width) for part in told))
        if self._plan is None:
            return (head, Text(), fit(Text("   Asking the history."), width))
        return (head, Text(), *chapter_lines(self._plan, width))
