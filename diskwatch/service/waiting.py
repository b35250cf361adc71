"""What waits to be written while the history cannot be: bounded, in order; what had to go is told."""

from collections import deque
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

from diskwatch.history.writer import History
from diskwatch.language import _, ngettext
from diskwatch.records import Entry, IoSpan, Listened, Round
from diskwatch.units import say_count

MOST_WAITING = 2_000
"""Writes that wait at most. Each batch of a round is one, and each quarter of an hour of traffic: five days fit
of six drives that answer one by one every half hour."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Traffic:
    """Spans of traffic to be kept."""

    spans: tuple[IoSpan, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Notes:
    """Lines for the day book that belong to no round."""

    entries: tuple[Entry, ...]


Write = Round | Listened | Traffic | Notes


class Waiting:
    """The writes that wait, oldest first."""

    def __init__(self, most: int = MOST_WAITING) -> None:
        """Begin.

        Args:
            most: how many wait at most; the oldest go for what comes then.
        """
        self._writes: deque[Write] = deque(maxlen=most)
        self.given_up = 0
        """How many had to go since they began to wait."""

    def __len__(self) -> int:
        """How many wait."""
        return len(self._writes)

    def __iter__(self) -> Iterator[Write]:
        """All of them, oldest first."""
        return iter(self._writes)

    @property
    def first(self) -> Write:
        """The oldest one."""
        return self._writes[0]

    def append(self, write: Write) -> None:
        """Let one more wait."""
        if len(self._writes) == self._writes.maxlen:
            self.given_up += 1
        # Answers in full would fill the memory while the history is out of reach: they are worth no waiting.
        self._writes.append(_without_answers(write) if self._writes else write)

    def done(self) -> None:
        """The oldest one waits no more."""
        self._writes.popleft()

    def lighten(self) -> None:
        """Let go of what is worth no waiting in the newest one, since it cannot be written now."""
        self._writes[-1] = _without_answers(self._writes[-1])

    def become(self, writes: Iterable[Write]) -> None:
        """Let these wait in place of those that do."""
        self._writes.clear()
        self._writes.extend(writes)

    def told(self) -> str:
        """What was given up, for the sentence about the trouble; empty where nothing was."""
        if not self.given_up:
            return ""
        return ngettext(
            "; more than {most} writes wait for it, and the oldest {count} was given up",
            "; more than {most} writes wait for it, and the oldest {count} were given up",
            self.given_up,
        ).format(most=say_count(self._writes.maxlen or 0), count=say_count(self.given_up))


def store(history: History, write: Write) -> None:
    """Write one of them.

    Raises:
        HistoryError: it could not be stored; nothing of it was.
    """
    match write:
        case Round():
            history.record(write)
        case Listened():
            history.listen(write)
        case Traffic():
            history.add_traffic(write.spans)
        case Notes():
            history.note(*write.entries)


def called(write: Write) -> str:
    """What a write is, for a sentence."""
    match write:
        case Round():
            return _("a round of readings")
        case Listened():
            return _("what was heard in the kernel's log")
        case Traffic():
            return _("a stretch of traffic")
        case Notes():
            lines = "; ".join(entry.text for entry in write.entries)
            return _("a line of the day book ({lines})").format(lines=lines)


def _without_answers(write: Write) -> Write:
    if not isinstance(write, Round):
        return write
    drives = tuple(replace(one, pass_=replace(one.pass_, answer=None)) for one in write.drives)
    return replace(write, drives=drives)
