"""Scripted senses: the recorded twin of a computer's log, for tests of what is done with it."""

from collections.abc import Iterable, Mapping

from diskwatch.errors import DiskwatchError
from diskwatch.machine.kernel_line import Line
from diskwatch.machine.partitions import Piece
from diskwatch.records import LeftOff, Value


class ScriptedLog:
    """A log of lines that a test adds to."""

    def __init__(self, lines: list[Line], left_off: LeftOff | None, *, live: bool) -> None:
        self.live = live
        self.lost = 0
        self.closed = False
        self._lines = lines
        self._at = left_off.sequence if left_off is not None and left_off.log == "boot" else -1

    @property
    def left_off(self) -> LeftOff:
        return LeftOff(log="boot", sequence=self._at)

    def fileno(self) -> int:
        raise AssertionError("a scripted log is read by hand")

    def read(self, most: int = 4_096) -> tuple[Line, ...]:
        found = tuple(line for line in self._lines if line.sequence > self._at)[:most]
        if found:
            self._at = found[-1].sequence
        return found

    def close(self) -> None:
        self.closed = True


class ScriptedSenses:
    """Senses whose lines, names and counts a test sets."""

    source = "/dev/kmsg"

    def __init__(self, *, live: bool = True) -> None:
        self.lines: list[Line] = []
        self.live = live
        self.now = 1_000.0
        self.battery = False
        self.counted: Mapping[str, tuple[Value, ...]] = {}
        self.pieces: Mapping[tuple[str, int], Piece] = {}
        self.refusal: str | None = None
        self.opened: list[ScriptedLog] = []

    def say(self, *texts: str, after: float = 1.0) -> None:
        """Let the kernel say something."""
        for text in texts:
            self.now += after
            self.lines.append(Line(len(self.lines), self.now, text))

    def log(self, left_off: LeftOff | None) -> ScriptedLog:
        if self.refusal is not None:
            raise DiskwatchError(self.refusal)
        self.opened.append(ScriptedLog(self.lines, left_off, live=self.live))
        return self.opened[-1]

    def names(self, drives: Mapping[str, Iterable[str]]) -> Mapping[str, tuple[str, ...]]:
        return {block: (drive,) for drive, blocks in drives.items() for block in blocks}

    def kept(self, blocks: Iterable[str]) -> tuple[Value, ...]:
        return tuple(value for block in blocks for value in self.counted.get(block, ()))

    def piece_at(self, block: str, sector: int) -> Piece | None:
        return self.pieces.get((block, sector))

    def on_battery(self) -> bool:
        return self.battery

    def uptime(self) -> float:
        return self.now
