"""Asking drives through smartctl: one process a drive and pass, bounded in time, waking none."""

import logging
import re
import time
from collections.abc import Callable
from dataclasses import dataclass, replace

from diskwatch.machine import outcomes
from diskwatch.machine.command import Answer, Door, Ending
from diskwatch.machine.document import Document, document_of, messages, plain_lines, text_at
from diskwatch.machine.outcomes import ASLEEP_STATUS, Verdict, quoted
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.reading import Understood, understood
from diskwatch.machine.text import decoded
from diskwatch.machine.told import merged
from diskwatch.records import Outcome, Pass

_log = logging.getLogger(__name__)

_SCANNED = re.compile(r"(?P<node>/[^\s#]+)(?:\s+-d\s+(?P<type>[^\s#]+))?\s*(?:#.*)?")
_TYPE = re.compile(r"[A-Za-z0-9][A-Za-z0-9,+/_-]{0,60}")
_USAGE = re.compile(
    r"(?:unrecogni[sz]ed|unknown|invalid|illegal|bad|unexpected|unsupported)\s+(?:command[- ]line\s+)?"
    r"(?:option|argument|flag|parameter|switch)"
    r"|argument required for option|usage:",
    re.IGNORECASE,
)
_NAMES_STANDBY = re.compile(r"(?:to|option:?|argument:?)\s+['\"]?-?-?n(?:ocheck)?\b|standby", re.IGNORECASE)
_NAMES_TYPE = re.compile(r"argument to -d\b", re.IGNORECASE)


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
class _Knows:
    """What a smartctl understands; old ones know less."""

    json: bool = True
    status: bool = True


class Smartctl:
    """A smartctl command, asked from any number of threads, one a drive."""

    def __init__(
        self, command: str, timeout: float, now: Callable[[], int], *, door: Door | None = None
    ) -> None:
        """Take a command; nothing is run yet.

        Args:
            command: a path, or a name on PATH.
            timeout: seconds that one drive may take to answer.
            now: the clock, UTC seconds since 1970.
            door: what runs it; by default a door of its own.
        """
        self._command = command
        self._timeout = timeout
        self._now = now
        self._door = door if door is not None else Door()
        # Both are replaced whole, so that a thread sees either the old or the new; the worst that a race costs
        # is one more process.
        self._knows = _Knows()
        self._worked: dict[str, str] = {}

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
        trouble = outcomes.of_scan(answer, command=self._command, timeout=self._timeout)
        if trouble is not None:
            return Scan(entries=(), trouble=trouble)
        found: dict[Address, None] = {}
        for line in decoded(answer.out).splitlines():
            entry = _SCANNED.fullmatch(line.strip())
            if entry is not None and (entry["type"] is None or _TYPE.fullmatch(entry["type"])):
                found[Address(node=entry["node"], type=entry["type"])] = None
        return Scan(entries=tuple(found))

    def ask(self, found: Found) -> Pass:
        """Ask one drive; whatever happens is a pass with an outcome, nothing is raised.

        Args:
            found: the drive, as the machine lists it.
        """
        begun = time.monotonic()
        try:
            told = self._asked(found)
        except Exception as error:  # noqa: BLE001 - one odd drive must never keep others from being watched
            _log.exception("the answer of %s could not be taken in", quoted(found.address.node))
            told = Pass(
                at=0,
                outcome=Outcome.GARBLED,
                explanation="It answered, but the answer could not be taken in: please report this as a fault "
                f"of diskwatch ({type(error).__name__}).",
            )
        return replace(told, at=self._now(), took_ms=int((time.monotonic() - begun) * 1000))

    def _asked(self, found: Found) -> Pass:
        node = found.address.node
        type_ = found.address.type or self._worked.get(_key(found))
        answer = self._answer(node, type_)
        verdict = outcomes.of_command(answer, command=self._command, timeout=self._timeout)
        if verdict is not None:
            return _pass(verdict, found, None, None)
        text = decoded(answer.out)
        document = document_of(text)
        lines = plain_lines(document) if document is not None else tuple(text.splitlines())
        what = understood(lines, document, type_=type_, path=found.drive.identity.path)
        said = (
            *lines,
            *(messages(document) if document is not None else ()),
            *decoded(answer.err).splitlines(),
        )
        verdict = outcomes.of_words(said, answer.status, what, expects_smart=found.expects_smart)
        if found.address.type is None:
            self._remember(found, verdict, document)
        return _pass(verdict, found, what, answer.status)

    def _answer(self, node: str, type_: str | None) -> Answer:
        """Run smartctl in the best way that it knows; learn where it knows less than was thought."""
        knows = self._knows
        while True:
            owner = f"{node} {type_ or ''}"
            answer = self._door.run(self._argv(node, type_, knows), timeout=self._timeout, owner=owner)
            complaint = _complaint(answer)
            lesser = _lesser(knows, complaint) if complaint is not None else None
            if complaint is None:
                self._knows = knows
            if lesser is None:
                return answer
            knows = lesser

    def _argv(self, node: str, type_: str | None, knows: _Knows) -> list[str]:
        return [
            self._command,
            "-n",
            f"standby,{ASLEEP_STATUS}" if knows.status else "standby",
            *(("-d", type_) if type_ is not None else ()),
            *(("--json=o",) if knows.json else ()),
            "--all",
            node,
        ]

    def _remember(self, found: Found, verdict: Verdict, document: Document | None) -> None:
        """Keep the type that worked, since finding out may wake a drive; forget one that failed."""
        worked = text_at(document, "device", "type")
        if verdict.outcome is Outcome.READ and worked is not None and _TYPE.fullmatch(worked):
            self._worked = {**self._worked, _key(found): worked}
        elif verdict.outcome in {Outcome.GARBLED, Outcome.NO_SMART}:
            self._worked = {key: type_ for key, type_ in self._worked.items() if key != _key(found)}


def _key(found: Found) -> str:
    """The node together with the drive, since another drive may come under the node."""
    who = found.drive.identity
    return "\0".join((found.address.node, who.wwn or "", who.model or "", who.serial or ""))


def _complaint(answer: Answer) -> str | None:
    """The line that says which option was not understood; None where the question was."""
    if answer.ending is not Ending.ENDED or answer.status == 0:
        return None
    said = f"{decoded(answer.out)}\n{decoded(answer.err)}"
    if "=== START OF" in said or _NAMES_TYPE.search(said) is not None:
        return None
    return next((line for line in said.splitlines() if _USAGE.search(line) is not None), None)


def _lesser(knows: _Knows, complaint: str) -> _Knows | None:
    """What to try next after a complaint; None where nothing is left."""
    if knows.status and (_NAMES_STANDBY.search(complaint) is not None or not knows.json):
        return replace(knows, status=False)
    return replace(knows, json=False) if knows.json else None


def _pass(verdict: Verdict, found: Found, what: Understood | None, status: int | None) -> Pass:
    """A pass, but for its time."""
    drive = merged(found.drive, what.drive) if what is not None and what.drive is not None else None
    return Pass(
        at=0,
        outcome=verdict.outcome,
        explanation=verdict.explanation,
        drive=drive,
        reading=what.reading if what is not None and verdict.outcome is Outcome.READ else None,
        exit_bits=status,
    )
