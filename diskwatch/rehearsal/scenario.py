"""A scenario: an invented machine, what befalls its drives, and what should be concluded.

Read from a TOML file that an owner can edit; ``fixtures/scenarios/`` in the repository has them, with a README
that tells every key.
"""

from typing import Annotated, Literal

import msgspec

from diskwatch.records import CallWord, Cause
from diskwatch.rehearsal.happenings import Event, NotNegative, Positive, Table, Text
from diskwatch.rehearsal.workload import Habit

MARK = "INVENTED"
"""Stands in every model and begins every serial, so that no output can be taken for one of real drives."""

_Count = Annotated[int, msgspec.Meta(ge=0)]

_GB, _TB = 10**9, 10**12


class DriveSpec(Table, frozen=True, kw_only=True):
    """An invented drive, as it is when the scenario begins.

    Attributes:
        serial: begins with `MARK`.
        model: contains `MARK`.
        kind: ``hdd``, ``ssd`` (behind ATA) or ``nvme``.
        device: its node, ``/dev/sda``.
        bay: the bay that it is in.
        capacity_gb: size, in units of 10^9 bytes.
        firmware: firmware revision.
        rpm: turns a minute, of a hard disk.
        lives_here: mount points.
        age_hours: powered hours so far.
        cycles: times it was powered up so far.
        written_tb: written by the computer so far, in units of 10^12 bytes.
        read_tb: read so far, likewise.
        reallocated: sectors replaced so far.
        pending: sectors that wait.
        bad_blocks: flash blocks replaced so far, of 400.
        crc: transfers damaged on the way so far.
        unsafe: power losses so far.
        rated_turns: turns of program and erase that the maker rates, of flash.
        amplification: bytes programmed for each byte written, of flash.
        load: how much work it gets, 1 as usual.
        sleeps: whether it stops turning when nothing is asked of it.
        backup: whether it is where backups come from, or go to.
        self_tests_days: days between two extended self-tests, 0 for none.
        as_text: whether its answers are printed as smartctl's text and read back from there.
        joins_day: day on which it is plugged in.
    """

    serial: Text
    model: Text
    kind: Literal["hdd", "ssd", "nvme"]
    device: Annotated[str, msgspec.Meta(pattern=r"^/dev/[a-z0-9]+$")]
    bay: Text
    capacity_gb: Annotated[int, msgspec.Meta(gt=0)]
    firmware: Text = "I1.0"
    rpm: Annotated[int, msgspec.Meta(ge=3_600, le=15_000)] = 7_200
    lives_here: tuple[str, ...] = ()
    age_hours: _Count = 0
    cycles: Annotated[int, msgspec.Meta(ge=1)] = 1
    written_tb: NotNegative = 0.0
    read_tb: NotNegative = 0.0
    reallocated: _Count = 0
    pending: _Count = 0
    bad_blocks: Annotated[int, msgspec.Meta(ge=0, le=400)] = 0
    crc: _Count = 0
    unsafe: _Count = 0
    rated_turns: Positive = 1_000.0
    amplification: Annotated[float, msgspec.Meta(ge=1)] = 2.0
    load: NotNegative = 1.0
    sleeps: bool = False
    backup: Literal["none", "source", "target"] = "none"
    self_tests_days: _Count = 0
    as_text: bool = False
    joins_day: NotNegative = 0.0

    @property
    def capacity(self) -> int:
        """Size, bytes."""
        return self.capacity_gb * _GB

    @property
    def written_bytes(self) -> int:
        """Bytes written so far."""
        return int(self.written_tb * _TB)

    @property
    def read_bytes(self) -> int:
        """Bytes read so far."""
        return int(self.read_tb * _TB)


class Expectation(Table, frozen=True, kw_only=True):
    """What should be concluded of a drive, or must not be.

    Attributes:
        drive: its serial; empty for every drive that no other expectation names.
        call: the call that it should reach, at least; None where none is asked for.
        cause: the cause that should be named with it.
        from_day: earliest day on which that would be right.
        by_day: latest day.
        stays: the strongest call that it may ever have.
        never_cause: causes that must never be named.
        needs: parts of the judgement that are not there yet and without which this cannot be concluded.
        because: one sentence of why.
    """

    drive: str = ""
    call: CallWord | None = None
    cause: Cause | None = None
    from_day: NotNegative = 0.0
    by_day: NotNegative | None = None
    stays: CallWord | None = None
    never_cause: tuple[Cause, ...] = ()
    needs: tuple[str, ...] = ()
    because: Text


class RoomSpec(Table, frozen=True, kw_only=True):
    """Where the machine stands; degrees Celsius."""

    celsius: float = 21.0
    season: NotNegative = 2.5
    daily: NotNegative = 1.0


class BaySpec(Table, frozen=True, kw_only=True):
    """A place for a drive, and the power strip that feeds it."""

    name: Text
    strip: str = "wall"


class Holiday(Table, frozen=True, kw_only=True):
    """Days on which nobody is there."""

    day: NotNegative
    days: Positive


class Scenario(Table, frozen=True, kw_only=True):
    """A whole scenario.

    Attributes:
        title: in a few words.
        about: what happens, and what is to be learnt from it.
        place: where the invented machine stands.
        days: how long it lasts.
        seed: of chance, where none is asked for.
        habit: how the machine is used.
        step_minutes: span of time that is lived through at once.
        every_hours: time between two rounds of readings.
        backup_hour: hour of the day at which backups begin; whole ones on Saturdays.
        strip: the power strip that feeds the machine itself: where that fails, all of it starts anew.
        room: where it stands.
        bay: its bays; one that a drive names and that is not here is a plain one.
        holiday: when nobody is there.
        drive: its drives.
        event: what happens.
        expect: what should be concluded.
    """

    title: Text
    about: str
    place: Text = "an invented place"
    days: Annotated[int, msgspec.Meta(gt=0, le=36_525)]
    seed: int = 1
    habit: Habit = "studio"
    step_minutes: Annotated[int, msgspec.Meta(ge=1, le=360)] = 60
    every_hours: Annotated[int, msgspec.Meta(ge=1, le=24)] = 6
    backup_hour: Annotated[int, msgspec.Meta(ge=0, le=23)] = 13
    strip: Text = "wall"
    room: RoomSpec = RoomSpec()
    bay: tuple[BaySpec, ...] = ()
    holiday: tuple[Holiday, ...] = ()
    drive: Annotated[tuple[DriveSpec, ...], msgspec.Meta(min_length=1, max_length=64)]
    event: tuple[Event, ...] = ()
    expect: tuple[Expectation, ...] = ()
