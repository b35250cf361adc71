"""What may befall the drives of an invented machine, as a scenario's file says it; `events` makes it happen."""

from typing import Annotated

import msgspec

Positive = Annotated[float, msgspec.Meta(gt=0)]
NotNegative = Annotated[float, msgspec.Meta(ge=0)]
Text = Annotated[str, msgspec.Meta(min_length=1, max_length=120)]


class Table(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A table of the file: unknown keys are refused."""


class _Event(Table, frozen=True, kw_only=True, tag_field="what"):
    """Something that happens.

    Attributes:
        day: when, in days since the beginning.
    """

    day: NotNegative


class Scratch(_Event, frozen=True, kw_only=True, tag="scratch"):
    """A place of a disk's surface is damaged: so many units of eight sectors, growing by a share a day."""

    drive: str
    units: Annotated[int, msgspec.Meta(gt=0)]
    growth: NotNegative = 0.0
    place: Annotated[float, msgspec.Meta(ge=0, le=1)] | None = None


class HeadWeakens(_Event, frozen=True, kw_only=True, tag="head-weakens"):
    """A head begins to need further turns; the share of such reads grows by this much of itself a day."""

    drive: str
    growth: Positive


class CableLoosens(_Event, frozen=True, kw_only=True, tag="cable-loosens"):
    """A connector works loose: on a share of days a burst of damaged transfers, some commands hang."""

    bay: str
    bad_days: Annotated[float, msgspec.Meta(gt=0, le=1)]
    burst: Positive
    hangs: Annotated[float, msgspec.Meta(ge=0, le=1)] = 0.0


class CableChanged(_Event, frozen=True, kw_only=True, tag="cable-changed"):
    """A bay gets a new cable."""

    bay: str


class Moved(_Event, frozen=True, kw_only=True, tag="moved"):
    """A drive is plugged into another bay; its node stays the same."""

    drive: str
    to: str


class Fan(_Event, frozen=True, kw_only=True, tag="fan"):
    """What the fan moves from now on; 1 as built, 0.3 with its way blocked by dust."""

    draught: Annotated[float, msgspec.Meta(gt=0, le=2)]


class HotSpell(_Event, frozen=True, kw_only=True, tag="hot-spell"):
    """Days on which the room is hotter than its season."""

    days: Positive
    celsius: float


class StripFails(_Event, frozen=True, kw_only=True, tag="strip-fails"):
    """A power strip loses power so many times a year from now on; 1 is usual."""

    strip: str
    losses_a_year: NotNegative


class Vanishes(_Event, frozen=True, kw_only=True, tag="vanishes"):
    """A drive is no longer there, for a while or for ever (0 days)."""

    drive: str
    days: NotNegative = 0.0


class Dies(_Event, frozen=True, kw_only=True, tag="dies"):
    """A drive dies: it is no longer there, and it counts as failed."""

    drive: str


class Busy(_Event, frozen=True, kw_only=True, tag="busy"):
    """So many days on which everything is used so many times as much."""

    days: Positive
    factor: Positive


class FirmwareUpdate(_Event, frozen=True, kw_only=True, tag="firmware-update"):
    """A new firmware; it may begin its link and time-out counters anew, as some do."""

    drive: str
    firmware: Text
    resets: bool = False


class BlocksFail(_Event, frozen=True, kw_only=True, tag="blocks-fail"):
    """Flash blocks go bad by themselves, so many a year from now on."""

    drive: str
    a_year: NotNegative


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
