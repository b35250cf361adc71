"""What may befall the drives of an invented machine, as a scenario's file says it; `events` makes it happen."""

from typing import Annotated

import msgspec

from diskwatch.rehearsal.media import LARGEST

MOST_DAYS = 36_525
"""A hundred years."""

Day = Annotated[float, msgspec.Meta(ge=0, le=MOST_DAYS)]
Days = Annotated[float, msgspec.Meta(gt=0, le=MOST_DAYS)]
Share = Annotated[float, msgspec.Meta(ge=0, le=1)]
Text = Annotated[str, msgspec.Meta(min_length=1, max_length=120)]
Growth = Annotated[float, msgspec.Meta(ge=0, le=10)]
Degrees = Annotated[float, msgspec.Meta(ge=-30, le=60)]


class Table(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A table of the file: unknown keys are refused."""


class _Event(Table, frozen=True, kw_only=True, tag_field="what"):
    """Something that happens.

    Attributes:
        day: when, in days since the beginning.
    """

    day: Day


class Scratch(_Event, frozen=True, kw_only=True, tag="scratch"):
    """A place of a disk's surface is damaged: so many units of eight sectors, growing by a share a day.

    The place is a share of the drive, 0 for its first block at the outer edge; anywhere where none is given.
    """

    drive: Text
    units: Annotated[int, msgspec.Meta(ge=1, le=LARGEST)]
    growth: Growth = 0.0
    place: Share | None = None


class HeadWeakens(_Event, frozen=True, kw_only=True, tag="head-weakens"):
    """A head begins to need further turns; the chance of that grows by this share of itself a day at first."""

    drive: Text
    growth: Annotated[float, msgspec.Meta(gt=0, le=10)]


class CableLoosens(_Event, frozen=True, kw_only=True, tag="cable-loosens"):
    """A connector works loose: on a share of days a burst of damaged transfers, some commands hang."""

    bay: Text
    bad_days: Annotated[float, msgspec.Meta(gt=0, le=1)]
    burst: Annotated[float, msgspec.Meta(gt=0, le=100_000)]
    hangs: Share = 0.0


class CableChanged(_Event, frozen=True, kw_only=True, tag="cable-changed"):
    """A bay gets a new cable."""

    bay: Text


class Moved(_Event, frozen=True, kw_only=True, tag="moved"):
    """A drive is plugged into another bay; its node stays the same."""

    drive: Text
    to: Text


class Fan(_Event, frozen=True, kw_only=True, tag="fan"):
    """What the fan moves from now on; 1 as built, 0.3 with its way blocked by dust."""

    draught: Annotated[float, msgspec.Meta(ge=0.1, le=2)]


class HotSpell(_Event, frozen=True, kw_only=True, tag="hot-spell"):
    """Days on which the room is hotter than its season."""

    days: Days
    celsius: Degrees


class StripFails(_Event, frozen=True, kw_only=True, tag="strip-fails"):
    """A power strip loses power so many times a year from now on; 1 is usual."""

    strip: Text
    losses_a_year: Annotated[float, msgspec.Meta(ge=0, le=10_000)]


class Vanishes(_Event, frozen=True, kw_only=True, tag="vanishes"):
    """A drive is no longer there, for a while or for ever (0 days)."""

    drive: Text
    days: Day = 0.0


class Dies(_Event, frozen=True, kw_only=True, tag="dies"):
    """A drive dies: it is no longer there, and it counts as failed."""

    drive: Text


class Busy(_Event, frozen=True, kw_only=True, tag="busy"):
    """So many days on which everything is used so many times as much."""

    days: Days
    factor: Annotated[float, msgspec.Meta(gt=0, le=1_000)]


class FirmwareUpdate(_Event, frozen=True, kw_only=True, tag="firmware-update"):
    """A new firmware; it may begin its link and time-out counters anew, as some do."""

    drive: Text
    firmware: Text
    resets: bool = False


class BlocksFail(_Event, frozen=True, kw_only=True, tag="blocks-fail"):
    """Flash blocks go bad by themselves, so many a year from now on."""

    drive: Text
    a_year: Annotated[float, msgspec.Meta(ge=0, le=100_000)]


Event = (
    Scratch
    | HeadWeakens
    | CableLoosens
    | CableChanged
    | Moved
    | Fan
    | HotSpell
    | StripFails
    | Vanishes
    | Dies
    | Busy
    | FirmwareUpdate
    | BlocksFail
)
