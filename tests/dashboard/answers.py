"""Invented answers to what the pages ask; each question is remembered."""

from collections.abc import Collection, Mapping

from diskwatch.dashboard.app import Dashboard
from diskwatch.dashboard.questions import Ahead, Chapter, Curve, Strand
from diskwatch.errors import DiskwatchError
from diskwatch.records import Bays, Entry, Margin
from diskwatch.units import DAY
from tests.dashboard.drives import ALL, NOW, bays

WORN = Curve(
    signal="percentage-used",
    words="Percentage used",
    unit="percent",
    now=71,
    since=NOW - 3 * DAY,
    evidence=None,
    points=tuple((NOW - days * DAY, 71.0 - days // 3) for days in range(30, -1, -3)),
    gaps=((NOW - 12 * DAY, NOW - 8 * DAY),),
    fit=((NOW - 30 * DAY, 61.0), (NOW, 71.0)),
    ahead=Ahead(limit=100.0, low=60.0, high=120.0),
)
WARM = Curve(
    signal="temperature",
    words="Temperature",
    unit="celsius",
    now=41,
    since=NOW - 600,
    evidence=900.0,
    points=tuple((NOW - hours * 3_600, 35.0 + hours % 7) for hours in range(700, 0, -4)),
    usual=(35.0, 41.0),
    held=False,
)
TOLD = Curve(
    signal="self-assessment",
    words="Self-assessment",
    unit="",
    now="passed",
    since=NOW - 90 * DAY,
    evidence=None,
)
ENTRIES = (
    Entry(at=NOW - 3 * DAY, drive=2, kind="rise", text="Pending sectors rose from 0 to 24."),
    Entry(at=NOW - 2 * DAY, drive=2, kind="call", text="The call became copy."),
    Entry(at=NOW - 3_600, drive=None, kind="watch", text="Watching began."),
)


class Answers:
    """A source of answers; where ``error`` is set every question fails with it."""

    def __init__(self, error: DiskwatchError | None = None) -> None:
        self.error = error
        self.asked: list[tuple[object, ...]] = []
        self.drawn: tuple[Curve, ...] = (WORN, WARM, TOLD)
        self.entries: tuple[Entry, ...] = ENTRIES

    def _take(self, *question: object) -> None:
        self.asked.append(question)
        if self.error is not None:
            raise self.error

    def strands(self, bays: Bays) -> Mapping[int, Strand]:
        self.asked.append(("strands",))
        left = Margin(low=60.0, high=120.0, probability=0.8, signal="percentage-used", limit=100.0)
        past = tuple((NOW // DAY - days, 3.0**days) for days in range(9, 0, -1))
        return {line.number: Strand(evidence=past, margin=left) for line in bays.drives}

    def why(self, number: int, at: int) -> tuple[Chapter, ...]:
        self._take("why", number, at)
        return (
            Chapter(title="What to do, and by when", lines=("Copy it off now.",)),
            Chapter(title="What would change the call", lines=("An invented change.",)),
        )

    def plan(self, number: int, at: int) -> tuple[Chapter, ...]:
        self._take("plan", number, at)
        return (Chapter(title="In this order", lines=("First the photos.", "Then the rest."), numbered=True),)

    def curves(self, number: int, since: int, at: int) -> tuple[Curve, ...]:
        self._take("curves", number, at - since)
        return self.drawn

    def day_book(self, drive: int | None, kinds: Collection[str] | None, limit: int) -> tuple[Entry, ...]:
        self._take("day_book", drive, kinds, limit)
        found = [one for one in self.entries if drive is None or one.drive == drive]
        return tuple(one for one in found if kinds is None or one.kind in kinds)

    def ticket(self, number: int, hide: Collection[str], at: int) -> str:
        self._take("ticket", number, sorted(hide), at)
        return "TICKET\n  serial S-1\n" if "serial" in hide else "TICKET\n  serial INV0001\n"

    def save(self, number: int, hide: Collection[str], at: int) -> str:
        self._take("save", number, sorted(hide), at)
        return "Written to /home/invented/ticket.json"

    def put_off(self, number: int, at: int) -> str:
        self._take("put_off", number, at)
        return "Notices are put off until Tuesday."


def dashboard(answers: Answers, shown: Bays | None = None, **more: bool) -> Dashboard:
    """A dashboard over invented drives that is answered by these."""
    told = bays(*ALL) if shown is None else shown
    return Dashboard(
        lambda _at: told,
        lambda: NOW,
        watching="watching from here",
        every=1_800,
        questions=answers,
        ascii_only=more.get("ascii_only", False),
        braille=more.get("braille", True),
    )
