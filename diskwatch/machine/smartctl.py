"""Asking drives through smartctl: one process a drive and pass, bounded in time, waking none."""

import logging
import re
import time
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace

from diskwatch.machine import endings, outcomes, ways
from diskwatch.machine.command import Answer, Door
from diskwatch.machine.dialect import Knows, complaint_of, lesser
from diskwatch.machine.document import Document, document_of, messages, plain_lines, text_at
from diskwatch.machine.endings import Verdict, quoted
from diskwatch.machine.optional import OptionalLogs
from diskwatch.machine.outcomes import ASLEEP_STATUS
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.reading import Understood, understood
from diskwatch.machine.rest import Completed, Rest
from diskwatch.machine.text import decoded, lines_of, names_version
from diskwatch.machine.told import merged
from diskwatch.machine.ways import TYPE, Ways
from diskwatch.records import Outcome, Pass, Way

_log = logging.getLogger(__name__)

LONGEST_ANSWER = 256 * 1024
"""Letters of an answer that is handed on word for word, at most: a full one has some 100,000."""

_SCANNED = re.compile(r"(?P<node>/[^\s#]+)(?:\s+-d\s+(?P<type>[^\s#]+))?\s*(?:#.*)?")


@dataclass(frozen=True, slots=True, kw_only=True)
class Scan:
    """What smartctl lists.

    Attributes:
        entries: each device once, in its order.
        trouble: what kept the list from being made, one sentence with what to do; None where nothing did.
    """

    entries: tuple[Address, ...]
    trouble: str | None = None


@dataclass(frozen=True, slots=True)
class _Told:
    """One question's answer: the type it was asked with, the verdict, and what there was to judge by.

    ``what`` is None where the command gave no whole answer.
    """

    type: str | None
    verdict: Verdict
    what: Understood | None = None
    said: tuple[str, ...] = ()
    document: Document | None = None
    status: int | None = None
    text: str = ""


def _uncounted() -> int | None:
    """For whoever has no counters: not known."""
    return None


class Smartctl:
    """A smartctl command, asked from any number of threads, one a drive."""

    def __init__(
        self,
        command: str,
        timeout: float,
        now: Callable[[], int],
        *,
        kept: Iterable[Way] = (),
        door: Door | None = None,
        awake: Callable[[], float] = time.monotonic,
    ) -> None:
        """Take a command; nothing is run yet.

        Args:
            command: a path, or a name on PATH.
            timeout: seconds that one drive may take to answer.
            now: the clock, UTC seconds since 1970.
            kept: what earlier passes found out of USB adapters, see `diskwatch.records.Pass.way`.
            door: what runs it; by default a door of its own.
            awake: seconds by a clock that only moves forward and stands still while the machine sleeps.
        """
        self._command = command
        self._timeout = timeout
        self._now = now
        self._awake = awake
        self._door = door if door is not None else Door()
        # Both are replaced whole, so that a thread sees either the old or the new; the worst that a race costs
        # is one more process.
        self._knows = Knows()
        self._genuine = False
        self._ways = Ways(kept)
        self._rest = Rest()
        self._optional = OptionalLogs()

    @property
    def abandoned(self) -> int:
        """How many processes were killed but are still held by the kernel."""
        return self._door.abandoned

    def stop(self) -> None:
        """End every question that is under way, at once; later ones are answered without asking."""
        self._door.stop()

    def scan(self) -> Scan:
        """List the devices that smartctl sees, opening none of them."""
        answer = self._door.run([self._command, "--scan"], timeout=self._timeout)
        trouble = endings.of_scan(answer, command=self._command, timeout=self._timeout)
        if trouble is not None:
            return Scan(entries=(), trouble=trouble)
        found: dict[Address, None] = {}
        for line in decoded(answer.out).splitlines():
            entry = _SCANNED.fullmatch(line.strip())
            if entry is not None and (entry["type"] is None or TYPE.fullmatch(entry["type"])):
                found[Address(node=entry["node"], type=entry["type"])] = None
        self._genuine = self._genuine or any(one.type is not None for one in found)
        if not self._genuine and not self._names_itself():
            return Scan(entries=tuple(found), trouble=endings.no_smartctl(self._command))
        return Scan(entries=tuple(found))

    def _names_itself(self) -> bool:
        """Whether the command says that it is smartctl, asked where an empty list leaves that open."""
        answer = self._door.run([self._command, "--version"], timeout=self._timeout)
        self._genuine = any(map(names_version, lines_of(decoded(answer.out))))
        return self._genuine

    def ask(self, found: Found, *, completed: Completed = _uncounted) -> Pass:
        """Ask one drive; whatever happens is a pass with an outcome, nothing is raised.

        Args:
            found: the drive, as the machine lists it.
            completed: counts its requests, to tell a drive that sleeps from one that does not answer.
        """
        begun = time.monotonic()
        try:
            before = completed()
            told = self._asked(found)
            verdict = self._rest.judged(found, told.verdict, before=before, after=completed(), at=self._awake())
            answer = _pass(replace(told, verdict=verdict), found)
        except Exception as error:  # noqa: BLE001 - one odd drive must never keep others from being watched
            _log.exception("the answer of %s could not be taken in", quoted(found.address.node))
            answer = Pass(
                at=0,
                outcome=Outcome.GARBLED,
                explanation="It answered, but the answer could not be taken in: please report this as a fault "
                f"of diskwatch ({type(error).__name__}).",
            )
        took = int((time.monotonic() - begun) * 1000)
        return replace(answer, at=self._now(), took_ms=took, way=self._ways.news(found))

    def begin_test(self, found: Found, *, extended: bool) -> str | None:
        """Have a drive test itself; the one deed here that is more than a question.

        Args:
            found: the drive, as the machine lists it.
            extended: whether it is to read its whole surface.

        Returns:
            None where the test began; else why it did not, one sentence.
        """
        type_ = self._ways.known(found) or found.address.type
        argv = [
            self._command,
            "-n",
            "standby",
            *(("-d", type_) if type_ is not None else ()),
            *("-t", "long" if extended else "short"),
            found.address.node,
        ]
        answer = self._door.run(argv, timeout=self._timeout, owner=found.place.device)
        verdict = endings.of_command(answer, command=self._command, timeout=self._timeout)
        if verdict is not None:
            return verdict.explanation or "it could not be asked."
        if not answer.status:
            return None
        said = lines_of(decoded(answer.out))
        told = next((line.strip() for line in reversed(said) if line.strip()), "")
        return f"it did not begin (exit status {answer.status}): {quoted(told[:200])}."

    def _asked(self, found: Found) -> "_Told":
        """Ask with the type that is known, and where that brings nothing with those that may do better."""
        deadline = time.monotonic() + self._timeout
        type_ = self._ways.known(found) or found.address.type
        told = self._told(found, type_, self._timeout, self._optional.wanted(found, self._now()))
        if self._is_outdated(found, told):
            self._ways.failed(found)
            left = deadline - time.monotonic()
            told = self._told(found, found.address.type, left) if left > 0 else told
        others = self._others(found, told)
        if found.address.type is None and told.what is not None:
            self._remember(found, told)
        for other in others:
            left = deadline - time.monotonic()
            another = self._told(found, other, left) if left > 0 else None
            if another is None or another.what is None:
                break  # no time is left, or one type hangs: the next would hang as well
            if ways.reaches(another.verdict):
                self._ways.settled(found, other)
                return another
        if len(others) > 1:
            self._ways.settled(found, None)
        elif others and told.verdict.outcome is Outcome.READ:
            self._ways.settled(found, told.type)
        silent = told.verdict.outcome is Outcome.NO_SMART or told.verdict.unproved
        if silent and self._ways.closed(found):
            return replace(told, verdict=outcomes.through_no_type(ways.usb_types(found)))
        return told

    def _is_outdated(self, found: Found, told: "_Told") -> bool:
        """Whether a type that was handed down does not reach the drive that is behind the adapter now."""
        if told.what is None or not self._ways.handed_down(found):
            return False
        # A device that stayed where it was while the watch began anew may be silent for reasons of its own.
        silent = told.verdict.unproved and self._ways.proved(found)
        return not silent and ways.unanswered(told.verdict, told.what)

    def _others(self, found: Found, told: "_Told") -> tuple[str, ...]:
        if told.what is None or self._ways.tried(found):
            return ()
        if told.verdict.unproved and self._ways.proved(found):
            return ()  # it answered to this type before, so that silence is its own
        return ways.others(found, told.type, told.said, told.verdict, told.what)

    def _told(self, found: Found, type_: str | None, timeout: float, logs: tuple[str, ...] = ()) -> "_Told":
        """Ask once, with one type, and judge the answer."""
        answer = self._answer(found, type_, timeout, logs)
        verdict = endings.of_command(answer, command=self._command, timeout=self._timeout)
        if verdict is not None:
            return _Told(type_, self._of_whom(verdict))
        text = decoded(answer.out)
        document = document_of(text)
        lines = plain_lines(document) if document is not None else lines_of(text)
        first = self._optional.statistics_first(found)
        what = understood(lines, document, type_=type_, path=found.drive.identity.path, statistics_first=first)
        said = (
            *lines,
            *(messages(document) if document is not None else ()),
            *lines_of(decoded(answer.err)),
        )
        self._genuine = self._genuine or what.genuine
        verdict = self._of_whom(
            outcomes.of_words(
                said,
                answer.status,
                what,
                expects_smart=found.expects_smart,
                kind=found.drive.kind,
                command=self._command,
            )
        )
        if verdict.outcome is Outcome.READ:
            reading = self._optional.learn(found, logs, what, lines, document, at=self._now())
            what = replace(what, reading=reading)
        return _Told(type_, verdict, what, said, document, answer.status, text)

    def _of_whom(self, verdict: Verdict) -> Verdict:
        """The verdict, where the command never listed or answered anything as smartctl does: on the command."""
        return verdict if self._genuine else endings.of_stranger(verdict, command=self._command)

    def _answer(self, found: Found, type_: str | None, timeout: float, logs: tuple[str, ...]) -> Answer:
        """Run smartctl in the best way that it knows; learn where it knows less than was thought."""
        knows = self._knows
        while True:
            argv = self._argv(found.address.node, type_, logs, knows)
            # By drive, whatever the type: where one question is stuck in the kernel, the next would be as well.
            answer = self._door.run(argv, timeout=timeout, owner=found.place.device)
            complaint = complaint_of(answer)
            if complaint is None:
                self._knows = knows
                return answer
            less = lesser(knows, complaint)
            if less is None:
                return answer
            knows = less

    def _argv(self, node: str, type_: str | None, logs: tuple[str, ...], knows: Knows) -> list[str]:
        return [
            self._command,
            "-n",
            f"standby,{ASLEEP_STATUS}" if knows.status else "standby",
            *(("-d", type_) if type_ is not None else ()),
            *(("--json=o",) if knows.json else ()),
            "--all",
            *(word for log in logs if log in knows.logs for word in ("-l", log)),
            node,
        ]

    def _remember(self, found: Found, told: "_Told") -> None:
        """Keep the type that worked, since finding out may wake a drive; forget one that failed."""
        worked = told.type or text_at(told.document, "device", "type")
        if ways.reaches(told.verdict) and worked is not None and TYPE.fullmatch(worked):
            self._ways.found_by_itself(found, worked)
        elif told.verdict.outcome in {Outcome.GARBLED, Outcome.NO_SMART}:
            self._ways.failed(found)


def _pass(told: _Told, found: Found) -> Pass:
    """A pass, but for its time."""
    what, outcome = told.what, told.verdict.outcome
    return Pass(
        at=0,
        outcome=outcome,
        explanation=told.verdict.explanation,
        drive=merged(found.drive, what.drive) if what is not None and what.drive is not None else None,
        reading=what.reading if what is not None and outcome is Outcome.READ else None,
        exit_bits=told.status,
        answer=told.text if outcome is Outcome.READ and len(told.text) <= LONGEST_ANSWER else None,
    )
