"""A scenario: an invented machine, what befalls its drives, and what should be concluded.

Read from a TOML file that an owner can edit; ``fixtures/scenarios/`` in the repository has them, with a README
that tells every key.
"""

from typing import Annotated, Literal

import msgspec

from diskwatch.records import CallWord, Cause
from diskwatch.rehearsal.happenings import MOST_DAYS, Day, Days, Degrees, Event, Table, Text
from diskwatch.rehearsal.workload import Habit

MARK = "INVENTED"
"""Stands in every model and begins every serial, so that no output can be taken for one of real drives."""

_Count = Annotated[int, msgspec.Meta(ge=0, le=1_000_000)]
_Terabytes = Annotated[float, msgspec.Meta(ge=0, le=1_000_000)]
_Swing = Annotated[float, msgspec.Meta(ge=0, le=30)]

MOST_SEED = 2**63 - 1
"""TOML's own bound of whole numbers."""

Seed = Annotated[int, msgspec.Meta(ge=-MOST_SEED, le=MOST_SEED)]

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
        pending: sectors that wait; eight lie in a physical sector and wait together.
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
    device: Annotated[str, msgspec.Meta(pattern=r"\A/dev/(sd[a-z]{1,3}|nvme[0-9]{1,3})\Z", max_length=20)]
    bay: Text
    capacity_gb: Annotated[int, msgspec.Meta(ge=1, le=1_000_000)]
    firmware: Text = "I1.0"
    rpm: Annotated[int, msgspec.Meta(ge=3_600, le=15_000)] = 7_200
    lives_here: Annotated[tuple[Text, ...], msgspec.Meta(max_length=64)] = ()
    age_hours: _Count = 0
    cycles: Annotated[int, msgspec.Meta(ge=1, le=1_000_000)] = 1
    written_tb: _Terabytes = 0.0
    read_tb: _Terabytes = 0.0
    reallocated: _Count = 0
    pending: Annotated[int, msgspec.Meta(ge=0, le=32_000, multiple_of=8)] = 0
    bad_blocks: Annotated[int, msgspec.Meta(ge=0, le=400)] = 0
    crc: _Count = 0
    unsafe: _Count = 0
    rated_turns: Annotated[float, msgspec.Meta(ge=1, le=1_000_000)] = 1_000.0
    amplification: Annotated[float, msgspec.Meta(ge=1, le=100)] = 2.0
    load: Annotated[float, msgspec.Meta(ge=0, le=1_000)] = 1.0
    sleeps: bool = False
    backup: Literal["none", "source", "target"] = "none"
    self_tests_days: Annotated[int, msgspec.Meta(ge=0, le=MOST_DAYS)] = 0
    as_text: bool = False
    joins_day: Day = 0.0

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
        foretells: the signal of which it should be said, by the latest day, when it reaches its limit, so that
            this comes true.
        stays: the strongest call that it may ever have.
        never_cause: causes that must never be named.
        because: one sentence of why.
    """

    drive: Annotated[str, msgspec.Meta(max_length=120)] = ""
    call: CallWord | None = None
    cause: Cause | None = None
    from_day: Day = 0.0
    by_day: Day | None = None
    foretells: Annotated[str, msgspec.Meta(min_length=1, max_length=120)] | None = None
    stays: CallWord | None = None
    never_cause: Annotated[tuple[Cause, ...], msgspec.Meta(max_length=20)] = ()
    because: Text


class RoomSpec(Table, frozen=True, kw_only=True):
    """Where the machine stands; degrees Celsius."""

    celsius: Degrees = 21.0
    season: _Swing = 2.5
    daily: _Swing = 1.0


class BaySpec(Table, frozen=True, kw_only=True):
    """A place for a drive, and the power strip that feeds it."""

    name: Text
    strip: Text = "wall"


class Holiday(Table, frozen=True, kw_only=True):
    """Days on which nobody is there."""

    day: Day
    days: Days


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
        probe: whether its owner lets idle disks be probed.
        strip: the power strip that feeds the machine itself: where that fails, all of it starts anew.
        room: where it stands.
        bay: its bays; one that a drive names and that is not here is a plain one.
        holiday: when nobody is there.
        drive: its drives.
        event: what happens.
        expect: what should be concluded.
    """

    title: Text
    about: Annotated[str, msgspec.Meta(max_length=4_000)]
    place: Text = "an invented place"
    days: Annotated[int, msgspec.Meta(ge=1, le=MOST_DAYS)]
    seed: Seed = 1
    habit: Habit = "studio"
    step_minutes: Annotated[int, msgspec.Meta(ge=1, le=360)] = 60
    every_hours: Annotated[int, msgspec.Meta(ge=1, le=24)] = 6
    backup_hour: Annotated[int, msgspec.Meta(ge=0, le=23)] = 13
    probe: bool = False
    strip: Text = "wall"
    room: RoomSpec = RoomSpec()
    bay: Annotated[tuple[BaySpec, ...], msgspec.Meta(max_length=64)] = ()
    holiday: Annotated[tuple[Holiday, ...], msgspec.Meta(max_length=1_000)] = ()
    drive: Annotated[tuple[DriveSpec, ...], msgspec.Meta(min_length=1, max_length=64)]
    event: Annotated[tuple[Event, ...], msgspec.Meta(max_length=1_000)] = ()
    expect: Annotated[tuple[Expectation, ...], msgspec.Meta(max_length=1_000)] = ()
