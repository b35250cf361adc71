"""Self-tests that the owner asked for: begun at a quiet hour, one drive at a time, followed to their end.

A test reads for minutes or hours on end. So none is begun on a drive that sleeps, on battery, or on a drive
whose data should be copied off: there it would wear what is to be saved. The day book remembers what was begun;
what a failed test found is a fact of the next reading (`diskwatch.judge.facts`).
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Protocol

from diskwatch.machine.protocol import Found
from diskwatch.records import CallWord, DriveRound, Entry, Kind, Outcome, SelfTest
from diskwatch.settings import SelfTests as Wanted
from diskwatch.units import DAY, plain, say_count

QUIET_HOURS = range(1, 5)
"""Hours of the day, local time, in which tests are begun (common practice, no source)."""

GIVEN_UP = {"short": DAY, "extended": 7 * DAY}
"""Seconds after which a test that shows no result is no longer waited for."""

_NO_TESTS = frozenset({CallWord.COPY, CallWord.RETIRE})
_RUNNING = ("progress", "running")


class Tester(Protocol):
    """Whoever can have a drive test itself."""

    def begin_test(self, found: Found, *, extended: bool) -> str | None:
        """Begin a test; None where it began, else why it did not, as a whole sentence about "it"."""
        ...


class SelfTests:
    """Belongs to the thread of the rounds."""

    def __init__(
        self,
        tester: Tester,
        wanted: Wanted,
        *,
        past: Callable[[], Iterable[Entry] | None],
        note: Callable[[Entry], None],
        on_battery: Callable[[], bool],
    ) -> None:
        """Begin.

        Args:
            tester: begins tests.
            wanted: how often the owner wants which test.
            past: entries of the day book about self-tests, oldest first; None while it cannot be read, and then
                nothing is begun, since nobody knows what was.
            note: takes an entry for the day book.
            on_battery: whether the machine runs on its battery.
        """
        self._tester = tester
        self._wanted = {"extended": wanted.long, "short": wanted.short}
        self._past = past
        self._note = note
        self._on_battery = on_battery
        self._begun: dict[int, dict[str, Entry]] | None = None
        self._open: dict[int, Entry] = {}

    @property
    def running(self) -> frozenset[int]:
        """Numbers of the drives whose tests are under way: they are awake, and their results are waited for."""
        return frozenset(self._open)

    def after(self, parts: Sequence[DriveRound], found: Mapping[int, Found], *, at: int, hour: int) -> None:
        """Follow tests that run, and begin one where it is due.

        Args:
            parts: what a round brought.
            found: the drives of that round as the machine lists them, by number.
            at: now, UTC seconds since 1970.
            hour: hour of the day, local time.
        """
        if not any(self._wanted.values()):
            return
        if self._begun is None:
            past = self._past()
            if past is None:
                return
            self._begun = {}
            for entry in past:
                self._remember(entry)
        for part in parts:
            self._follow(part, at)
        if self._open or hour not in QUIET_HOURS or self._on_battery():
            return
        for part in parts:
            number = part.known.number
            test = self._due(part, at) if number in found else None
            if test is not None:
                self._begin(part, found[number], test, at)
                return

    def _due(self, part: DriveRound, at: int) -> str | None:
        """Which test of a drive is due; the extended one first, since it tests all that the short one does."""
        if part.pass_.outcome is not Outcome.READ or part.known.drive.kind is Kind.VIRTUAL:
            return None
        if part.call is None or part.call.word in _NO_TESTS:
            return None
        begun = (self._begun or {}).get(part.known.number, {})
        for test, every in self._wanted.items():
            if every is not None and (test not in begun or at - begun[test].at >= every):
                return test
        return None

    def _begin(self, part: DriveRound, found: Found, test: str, at: int) -> None:
        refused = self._tester.begin_test(found, extended=test == "extended")
        text = (
            f"A {test} self-test of it began." if refused is None else f"No {test} self-test of it: {refused}"
        )
        data = {"test": test, "begun": refused is None, "logged": _logged(part)}
        self._told(Entry(at=at, drive=part.known.number, kind="self-test", text=text, data=data))

    def _follow(self, part: DriveRound, at: int) -> None:
        number = part.known.number
        began = self._open.get(number)
        if began is None:
            return
        test = str(began.data["test"])
        reading = part.pass_.reading
        newest = next(iter(reading.self_tests), None) if reading is not None else None
        running = newest is not None and any(word in newest.result.lower() for word in _RUNNING)
        if newest is not None and not running and _logged(part) != began.data["logged"]:
            self._told(
                Entry(
                    at=at, drive=number, kind="self-test", text=_ended(test, newest), data=_data(test, newest)
                )
            )
        elif at - began.at >= GIVEN_UP[test]:
            text = f"The {test} self-test of it showed no result; it is no longer waited for."
            self._told(Entry(at=at, drive=number, kind="self-test", text=text, data={"test": test}))

    def _told(self, entry: Entry) -> None:
        self._note(entry)
        self._remember(entry)

    def _remember(self, entry: Entry) -> None:
        if entry.drive is None or self._begun is None:
            return
        if "begun" not in entry.data:
            self._open.pop(entry.drive, None)
            return
        # One that the drive refused counts as well: it is asked again when the next one is due.
        self._begun.setdefault(entry.drive, {})[str(entry.data["test"])] = entry
        if entry.data["begun"]:
            self._open[entry.drive] = entry


def _logged(part: DriveRound) -> list[object]:
    """What tells one state of a drive's self-test log from another."""
    tests = part.pass_.reading.self_tests if part.pass_.reading is not None else ()
    done = [one for one in tests if not any(word in one.result.lower() for word in _RUNNING)]
    return [len(done), *([done[0].name, done[0].result, done[0].hours] if done else [])]


def _ended(test: str, newest: SelfTest) -> str:
    where = f" at block {say_count(newest.lba)}" if newest.lba is not None else ""
    return f"The {test} self-test of it ended: {plain(newest.result)}{where}."


def _data(test: str, newest: SelfTest) -> dict[str, object]:
    return {"test": test, "passed": newest.passed, "result": plain(newest.result), "lba": newest.lba}
