"""What is at stake on a drive, and how it can be got off: numbers and their order, without words. Pure.

The words are in `diskwatch.judge.copy_words`.
"""

import math
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum

from diskwatch.records import CallWord, DriveLine, Kind, Mount
from diskwatch.records.array import Array
from diskwatch.trends.read_rate import ReadRate

CLASS_RATES: Mapping[Kind, tuple[float, float]] = {
    Kind.HDD: (60e6, 180e6),
    Kind.SAS: (80e6, 220e6),
    Kind.SSD: (150e6, 500e6),
    Kind.NVME: (500e6, 3000e6),
    Kind.USB: (25e6, 120e6),
    Kind.VIRTUAL: (50e6, 1000e6),
}
"""Bytes a second at which drives of a sort are usually read in bulk, low and high.

Common practice, no source.
"""

ERROR_RATES: Mapping[Kind, tuple[float, float]] = {
    Kind.HDD: (1e-15, 1e-14),
    Kind.SAS: (1e-16, 1e-15),
    Kind.SSD: (1e-16, 1e-15),
    Kind.NVME: (1e-16, 1e-15),
    Kind.USB: (1e-15, 1e-14),
}
"""Unreadable bits a bit read that makers of a class allow at most, best and worst of the class.

Hard drives: makers' product manuals state 1 in 10^14 for value lines, 1 in 10^15 for nearline ones and 10 in
10^17 for enterprise ones. Solid-state drives: JESD218, table 1, at most 10^-15 for the client class and 10^-16
for the enterprise class. A USB case may hold any; a virtual disk stands on what cannot be seen.
"""

_SYSTEM = frozenset({"/", "/bin", "/boot", "/efi", "/lib", "/nix", "/opt", "/sbin", "/snap", "/usr"})
_SWAP = "swap"
_PENDING = ("pending-sectors", "offline-uncorrectable")


class Holds(StrEnum):
    """Why a file system stands where it does in the order.

    HOME holds a home folder of whoever asks; HISTORY the history of this program; DATA is all else that cannot
    be installed anew; SYSTEM can be; SWAP needs no copy.
    """

    HOME = "home"
    DATA = "data"
    HISTORY = "history"
    SYSTEM = "system"
    SWAP = "swap"


@dataclass(frozen=True, slots=True, kw_only=True)
class Held:
    """One file system on the drive.

    Attributes:
        mount: where, and how much.
        holds: what it holds, the most telling first.
        hours: how long reading what is used there takes, low and high; None where that is not known.
    """

    mount: Mount
    holds: tuple[Holds, ...]
    hours: tuple[float, float] | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Unreadable:
    """How likely a full read is to meet a sector that cannot be read, by what makers of the class allow.

    It is the bound of a class and no forecast for one drive: errors cluster, and most drives do far better.

    Attributes:
        bits: bits of a full read.
        rates: unreadable bits a bit read, best and worst of the class.
        chances: of at least one, 0 to 1, for both.
    """

    bits: int
    rates: tuple[float, float]
    chances: tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class CopyPlan:
    """How to get off what lives on a drive.

    Attributes:
        call: the drive's call; None before it was read.
        held: its file systems in the order in which to copy them; swap last.
        used_bytes: what is to be copied; None where no file system told its size.
        incomplete: whether some file system did not tell.
        rate: how fast it can be read.
        hours: how long reading all that is used takes, low and high, or None.
        whole_hours: the same for the whole drive, sector by sector, or None.
        unreadable: the chance of an unreadable sector over the whole drive; None where the class or the size is
            not known.
        pending: sectors known not to be readable now; None where the drive does not count them.
        arrays: what it is a member of; None where it is not plugged in here, so that nobody could look.
        backed_up: day of the last backup by the owner's word, or None.
        turns: whether it has platters.
    """

    call: CallWord | None
    held: tuple[Held, ...]
    used_bytes: int | None
    incomplete: bool
    rate: ReadRate
    hours: tuple[float, float] | None
    whole_hours: tuple[float, float] | None
    unreadable: Unreadable | None
    pending: int | None
    arrays: tuple[Array, ...] | None
    backed_up: str | None
    turns: bool


def copy_plan(
    line: DriveLine,
    *,
    rate: ReadRate | None,
    arrays: Sequence[Array] | None,
    homes: Collection[str] = (),
    history: str | None = None,
) -> CopyPlan:
    """Make the plan.

    Args:
        line: the drive as last known.
        rate: how fast it was really read; None where it never was, in bulk.
        arrays: what it is a member of; None where nobody could look.
        homes: mount points on it that hold home folders of whoever asks.
        history: the mount point on it that holds this program's history, or None.
    """
    drive = line.drive
    turns = is_turning(line)
    low, high = CLASS_RATES[drive.kind]
    given = rate or ReadRate(low=low, high=high, stretches=0)
    held = [
        Held(
            mount=mount,
            holds=_holds(mount.point, homes, history),
            hours=_hours(mount.used_bytes, given),
        )
        for mount in line.place.lives_here
    ]
    wanted = [one.mount for one in held if Holds.SWAP not in one.holds]
    known = [mount.used_bytes for mount in wanted if mount.used_bytes is not None]
    used = sum(known) if known else None
    return CopyPlan(
        call=None if line.call is None else line.call.word,
        held=tuple(sorted(held, key=_first_what_cannot_be_replaced)),
        used_bytes=used,
        incomplete=len(known) < len(wanted),
        rate=given,
        hours=_hours(used, given),
        whole_hours=_hours(drive.capacity_bytes, given),
        unreadable=unreadable(drive.kind, drive.capacity_bytes),
        pending=_pending(line),
        arrays=None if arrays is None else tuple(arrays),
        backed_up=line.owner.backed_up,
        turns=turns,
    )


def is_turning(line: DriveLine) -> bool:
    """Whether a drive has platters; where it does not say, a drive sold as a hard disk is taken to."""
    return line.drive.kind is Kind.HDD or bool(line.drive.rotation_rpm)


def unreadable(kind: Kind, capacity_bytes: int | None) -> Unreadable | None:
    """The chance that reading a whole drive meets an unreadable sector, by the bound of its class.

    Args:
        kind: its sort.
        capacity_bytes: its size, or None.
    """
    rates = ERROR_RATES.get(kind)
    if rates is None or capacity_bytes is None:
        return None
    bits = capacity_bytes * 8
    best, worst = (chance_of_one(rate, bits) for rate in rates)
    return Unreadable(bits=bits, rates=rates, chances=(best, worst))


def chance_of_one(rate: float, bits: int) -> float:
    """``1 - (1 - rate)^bits``, exact also where the rate is far below what a difference from 1 can show.

    Args:
        rate: chance that one bit cannot be read, 0 to less than 1.
        bits: how many are read.
    """
    return -math.expm1(bits * math.log1p(-rate))


def _hours(count: int | None, rate: ReadRate) -> tuple[float, float] | None:
    return None if count is None else (count / rate.high / 3600, count / rate.low / 3600)


def _pending(line: DriveLine) -> int | None:
    found = [
        signal.value for signal in line.signals if signal.name in _PENDING and isinstance(signal.value, int)
    ]
    return max(found, default=None)


def _holds(point: str, homes: Collection[str], history: str | None) -> tuple[Holds, ...]:
    if point == _SWAP:
        return (Holds.SWAP,)
    system = point in _SYSTEM or any(point.startswith(f"{top}/") for top in _SYSTEM - {"/"})
    told = [Holds.HOME] if point in homes else []
    told += [Holds.SYSTEM if system else Holds.DATA]
    return (*told, *([Holds.HISTORY] if point == history else []))


def _first_what_cannot_be_replaced(held: Held) -> tuple[int, int, str]:
    """Home folders, then other data, then what can be installed anew; of equals the smaller is saved sooner."""
    rank = tuple(Holds).index(held.holds[0])
    size = held.mount.used_bytes
    return rank, 1 << 80 if size is None else size, held.mount.point
