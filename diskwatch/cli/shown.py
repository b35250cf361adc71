"""What the dashboard's pages are answered: each question put to the history, and judged where it must be.

The dashboard itself reads records only; what needs the analyser or this machine is done here, when it is asked.
"""

import os
from collections.abc import Callable, Collection, Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING

from diskwatch.dashboard.questions import Chapter, Curve, Strand
from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.history.reader import Past
from diskwatch.records import Bays, DriveLine, Entry
from diskwatch.units import DAY, rfc3339

if TYPE_CHECKING:
    from diskwatch.settings import Settings

_STRIP = 366 * DAY
_FIRST = (
    "What would change the call",
    "What became of other drives that showed the same",
    "Margin",
    "Forecasts",
)
"""Parts of the chain that a person wants before those that prove it."""
_TRIES = 99


class Shown:
    """Answers in the dashboard's asking thread; the history is opened when it is there."""

    def __init__(self, past: Callable[[], Past], folder: Path, settings: "Settings | None") -> None:
        """Take the way to the history, its folder, and the owner's settings, where there are any."""
        self._past = past
        self._folder = folder
        self._settings = settings

    def strands(self, bays: Bays) -> Mapping[int, Strand]:
        """Each drive's year of evidence, and its margin."""
        if not bays.drives:
            return {}
        from diskwatch.judge.stakes import margin_of  # noqa: PLC0415 - the first frame does not wait for it

        days = self._past().strongest(bays.at - _STRIP)
        return {
            line.number: Strand(evidence=days.get(line.number, ()), margin=margin_of(line, bays.at))
            for line in bays.drives
        }

    def why(self, number: int, at: int) -> tuple[Chapter, ...]:
        """The chain from readings to the call, what a person does with it first."""
        from diskwatch import analyser  # noqa: PLC0415 - the first frame does not wait for it
        from diskwatch.cli.said import said  # noqa: PLC0415 - likewise
        from diskwatch.cli.why import chapters  # noqa: PLC0415 - likewise

        past, line = self._past(), self.line(number, at)
        kept = past.state(number)
        state = analyser.start() if kept is None else analyser.load(kept)
        told = [
            Chapter(title=title, lines=tuple(lines))
            for title, lines in chapters(line, analyser.explain(state), past.kept_forecasts(number), at)
        ]
        first = [one for title in _FIRST for one in told if one.title == title]
        words = said(line, at)
        head = Chapter(title="What to do, and by when", lines=tuple(_to_do(line, at)))
        owner = Chapter(title="What you said of it", lines=() if words is None else (words,))
        return (head, *first, *(one for one in told if one not in first), owner)

    def plan(self, number: int, at: int) -> tuple[Chapter, ...]:
        """What is at stake, and how to get it off."""
        from diskwatch.cli.copy_plan import TITLES, planned  # noqa: PLC0415 - the first frame does not wait for it

        _, parts = planned(self._past(), self.line(number, at), self._folder, at)
        titles = {"urgency": "How urgent it is", **TITLES}
        return tuple(
            Chapter(title=title, lines=parts[name], numbered=name == "order") for name, title in titles.items()
        )

    def curves(self, number: int, since: int, at: int) -> tuple[Curve, ...]:
        """Every signal of a drive over a span."""
        from diskwatch.cli.curves import Span, curves  # noqa: PLC0415 - the first frame does not wait for it

        return curves(self._past(), self.line(number, at), Span(since=since, at=at))

    def day_book(self, drive: int | None, kinds: Collection[str] | None, limit: int) -> tuple[Entry, ...]:
        """The newest so many entries, oldest first."""
        return self._past().day_book(drive=drive, kinds=kinds, limit=limit)

    def ticket(self, number: int, hide: Collection[str], at: int) -> str:
        """The ticket's printed page."""
        from diskwatch.ticket.page import page  # noqa: PLC0415 - the first frame does not wait for it

        return page(self._ticket(number, hide, at))

    def save(self, number: int, hide: Collection[str], at: int) -> str:
        """Write the ticket as JSON into the folder where the dashboard was opened, never over another file."""
        from diskwatch.ticket.writing import put, text_of  # noqa: PLC0415 - the first frame does not wait for it

        text = text_of(self._ticket(number, hide, at))
        begin = f"diskwatch-ticket-{rfc3339(at)[:10]}"
        for nth in range(1, _TRIES):
            path = Path.cwd() / (f"{begin}.json" if nth == 1 else f"{begin}-{nth}.json")
            if os.path.lexists(path):
                continue
            put(path, text, force=False)
            return f"Written to {path}"
        raise UsageError(f"there are too many tickets of today in {Path.cwd()}", hint="move some away")

    def put_off(self, number: int, at: int) -> str:
        """Put this user's notices about a drive off for as long as 'later' does."""
        from diskwatch.cli.later import defer  # noqa: PLC0415 - the first frame does not wait for it

        return defer(self.line(number, at), at)

    def line(self, number: int, at: int) -> DriveLine:
        """A drive by its number in the history.

        Raises:
            DiskwatchError: the history does not know it any more.
        """
        line = next((one for one in self._past().bays(at).every if one.number == number), None)
        if line is None:
            raise DiskwatchError("the history does not know this drive any more", hint="press Esc")
        return line

    def _ticket(self, number: int, hide: Collection[str], at: int) -> dict[str, object]:
        from diskwatch.cli.ticket import that_matter, this_host  # noqa: PLC0415 - the first frame does not wait for it
        from diskwatch.ticket.document import About, ticket  # noqa: PLC0415 - likewise
        from diskwatch.ticket.names import Hidden  # noqa: PLC0415 - likewise

        about = About(
            at=at,
            host=this_host(),
            settings=None if self._settings is None else that_matter(self._settings),
            hide=tuple(kind for kind in Hidden if kind in hide),
        )
        past = self._past()
        return ticket(past, past.bays(at), number, about)


def _to_do(line: DriveLine, at: int) -> Iterator[str]:
    from diskwatch.judge.stakes import in_time  # noqa: PLC0415 - the first frame does not wait for it

    if line.call is None:
        return
    yield line.call.reason
    yield from in_time(line, at)
