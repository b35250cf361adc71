"""What was told to this user, by which way: a small file in the user's own state folder.

    ~/.local/state/diskwatch/notices.json
        {"schema": "diskwatch/notices/1",
         "ways": {"desktop": {"drives": {"NAME": {"call": "copy", "at": 1796126400}}, ...}, "command": {...}},
         "bubbles": {"NAME": {"place": "...", "number": 12}},
         "failures": {"command": {"at": 1796126400, "text": "..."}}}

It outlives the agent, so that a restart says nothing twice. A file that is none of ours, or broken, counts as
an empty one: to say something twice is better than never to say it.
"""

import os
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass, field, replace
from pathlib import Path

import msgspec

from diskwatch.errors import DiskwatchError
from diskwatch.history.guarding import open_plain
from diskwatch.history.later import replace_whole
from diskwatch.notices.policy import State
from diskwatch.units import plain

FILE = "notices.json"
SCHEMA = "diskwatch/notices/1"
_LARGEST = 1 << 20


@dataclass(frozen=True, slots=True, kw_only=True)
class Bubble:
    """A notice on the screen.

    Attributes:
        place: which server on which bus shows it: numbers mean something there alone.
        number: the server's number for it.
    """

    place: str
    number: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Failure:
    """The last time that a way failed.

    Attributes:
        at: when, UTC seconds since 1970.
        text: what happened, one sentence.
    """

    at: int
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Memory:
    """All that an agent remembers.

    Attributes:
        schema: of the file.
        ways: what was told, by way.
        bubbles: notices that may still be on the screen, by the drive's lasting name or their subject.
        failures: the last failure of each way that failed.
    """

    schema: str = SCHEMA
    ways: Mapping[str, State] = field(default_factory=dict)
    bubbles: Mapping[str, Bubble] = field(default_factory=dict)
    failures: Mapping[str, Failure] = field(default_factory=dict)

    def of(self, way: str) -> State:
        """What was told by one way."""
        return self.ways.get(way, State())

    def told(self, way: str, state: State) -> "Memory":
        """With what was told by one way."""
        return replace(self, ways={**self.ways, way: state})

    def shown(self, about: str, bubble: Bubble) -> "Memory":
        """With a notice on the screen."""
        return replace(self, bubbles={**self.bubbles, about: bubble})

    def failed(self, way: str, failure: Failure) -> "Memory":
        """With a failure."""
        return replace(self, failures={**self.failures, way: failure})


def read(folder: Path) -> Memory:
    """What the agent of this user remembers; nothing where there is no such file.

    Args:
        folder: the user's own state folder.
    """
    with suppress(OSError, DiskwatchError, msgspec.DecodeError, ValueError):
        with os.fdopen(open_plain(folder / FILE, os.O_RDONLY), "rb") as file:
            found = msgspec.json.decode(file.read(_LARGEST), type=Memory)
        if found.schema == SCHEMA:
            return found
    return Memory()


def keep(folder: Path, memory: Memory) -> None:
    """Write down what is remembered, whole or not at all.

    Args:
        folder: the user's own state folder; made where it does not exist.
        memory: all of it.

    Raises:
        DiskwatchError: it cannot be written.
    """
    path = folder / FILE
    try:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        replace_whole(path, msgspec.json.format(msgspec.json.encode(memory)).decode() + "\n")
    except OSError as error:
        raise DiskwatchError(
            f"{plain(str(path))} cannot be written: {error.strerror}", hint="see to that folder first"
        ) from error
