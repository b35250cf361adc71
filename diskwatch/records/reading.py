"""What one pass over a drive brought."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

from diskwatch.records.drive import Drive
from diskwatch.records.way import Way


class Outcome(StrEnum):
    """How a pass ended; every pass has one and it is always recorded."""

    READ = "read"
    NO_SMART = "no-smart"
    ASLEEP = "asleep"
    REFUSED = "refused"
    NO_TOOL = "no-tool"
    TIMED_OUT = "timed-out"
    ABSENT = "absent"
    GARBLED = "garbled"


class SignalKind(StrEnum):
    """How a signal behaves over time.

    COUNT only grows on a sane drive; GAUGE goes both ways; WEAR is used up or left over; TIME counts hours;
    WORD is not a number.
    """

    COUNT = "count"
    GAUGE = "gauge"
    WEAR = "wear"
    TIME = "time"
    WORD = "word"


@dataclass(frozen=True, slots=True, kw_only=True)
class Value:
    """One signal's value in one reading.

    Attributes:
        signal: its name in trade words joined by hyphens, say ``pending-sectors``.
        value: a whole number in ``unit``, or a word; None where the drive names the signal without a usable
            value, and then ``reason`` says why. A signal that the drive does not have is left out instead.
        unit: ``sectors``, ``bytes``, ``hours``, ``celsius``, ``percent``, ``events`` …; ``opaque`` where the
            maker's packing is not known, so that only changes mean anything.
        kind: how it behaves over time.
        source: where on the drive it stood, say ``attribute 197`` or ``NVMe log 02h``.
        reason: why ``value`` is None; None otherwise.
    """

    signal: str
    value: int | str | None
    unit: str
    kind: SignalKind
    source: str
    reason: str | None = None


KERNEL_LOG = "kernel log"
FILE_SYSTEMS = "file systems"
ARRAYS = "arrays"
SENSES = frozenset({KERNEL_LOG, FILE_SYSTEMS, ARRAYS})
"""Sources of what is not the drive's own word; such values come with any outcome."""


class Failing(StrEnum):
    """Whether an ATA attribute's normalised value is at or below its threshold."""

    NOW = "now"
    PAST = "past"


@dataclass(frozen=True, slots=True, kw_only=True)
class Attribute:
    """One row of an ATA drive's attribute table, as printed.

    Attributes:
        number: attribute id, 1 to 255.
        name: the name printed beside it; a maker's habit, no standard.
        value: normalised value, 1 to 254, higher is better; None where none is printed.
        worst: lowest normalised value so far, or None.
        threshold: limit below which the drive calls it failed; 0 never fails; or None.
        prefail: True where falling to the threshold predicts failure, False where it marks end of design life.
        raw: raw value as printed.
        failing: now, in the past, or None.
    """

    number: int
    name: str
    value: int | None
    worst: int | None
    threshold: int | None
    prefail: bool
    raw: str
    failing: Failing | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SelfTest:
    """One entry of a drive's self-test log, newest first in a reading.

    Attributes:
        name: what was tested, as printed (``Extended offline``).
        result: how it ended, as printed.
        extended: True for a test that reads the whole surface.
        passed: True completed without error, False failed, None neither (aborted, interrupted, still running).
        unreadable: True where it failed because a sector could not be read.
        hours: powered hours at which it ran, or None.
        lba: first failing block, or None.
    """

    name: str
    result: str
    extended: bool
    passed: bool | None
    unreadable: bool = False
    hours: int | None = None
    lba: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """The values that one pass brought.

    Attributes:
        values: one a signal; no signal stands twice.
        attributes: ATA attribute table as printed; empty for other drives.
        self_tests: self-test log, newest first.
        warning_celsius: the drive's own temperature limit for a warning, or None.
        critical_celsius: the drive's own critical temperature, or None.
    """

    values: tuple[Value, ...] = ()
    attributes: tuple[Attribute, ...] = ()
    self_tests: tuple[SelfTest, ...] = ()
    warning_celsius: int | None = None
    critical_celsius: int | None = None
    _named: Mapping[str, int | str | None] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        """Lay the values out by name: a judgement asks for two dozen of them."""
        object.__setattr__(self, "_named", {value.signal: value.value for value in reversed(self.values)})

    def get(self, signal: str) -> int | str | None:
        """The value of a signal, or None where it is absent or unknown."""
        return self._named.get(signal)

    def number(self, signal: str) -> int | None:
        """The value of a signal where it is a number, else None."""
        value = self._named.get(signal)
        return value if isinstance(value, int) else None


@dataclass(frozen=True, slots=True, kw_only=True)
class Pass:
    """One round of asking one drive.

    Attributes:
        at: when it ended, UTC, whole seconds since 1970.
        outcome: how it ended.
        explanation: one whole sentence of why, with its full stop and without the drive's name, for every
            outcome but ``read``; None for ``read``.
        drive: the drive as it described itself, or None where it said nothing of itself.
        reading: what it brought; None unless the outcome is ``read`` (a drive without SMART brings none).
        exit_bits: smartctl's exit status, or None where it did not end by itself.
        took_ms: how long the answer took, milliseconds.
        heard: what the machine's other senses count of it (the kernel's log, file systems, arrays), whatever
            the outcome; empty where nothing listens.
        way: what it found out of the USB adapter before the drive; None where that is no news.
        answer: what smartctl printed, word for word; None where it was not read, or is too long to be kept.
    """

    at: int
    outcome: Outcome
    explanation: str | None = None
    drive: Drive | None = None
    reading: Reading | None = field(default=None, repr=False)
    exit_bits: int | None = None
    took_ms: int = 0
    heard: tuple[Value, ...] = ()
    way: Way | None = None
    answer: str | None = field(default=None, repr=False, compare=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class PassDay:
    """How many passes over a drive ended in one way on one day; so "no change" stays knowledge for ever.

    Attributes:
        day: UTC day number, counted from 1970-01-01.
        outcome: how they ended.
        passes: how many.
        first: time of the first, UTC seconds since 1970.
        last: time of the last.
    """

    day: int
    outcome: Outcome
    passes: int
    first: int
    last: int
