"""Which drive a person means by a serial, a WWN, a device name, a label, or a part of one. Pure."""

from collections.abc import Iterable, Sequence

from diskwatch.errors import DriveUnknown
from diskwatch.records import DriveLine, Outcome
from diskwatch.units import plain

_MOST_NAMED = 8


def choose(text: str, lines: Sequence[DriveLine]) -> DriveLine:
    """The one drive that a text means, upper and lower case alike; a whole name wins over parts of others.

    A device name means the drive that was last seen there: names pass from drive to drive.

    Args:
        text: what the person wrote.
        lines: all drives.

    Raises:
        DriveUnknown: no drive fits, or more than one; those that could be meant are named.
    """
    wanted = text.strip().casefold()
    if not wanted:
        raise DriveUnknown("no drive is named", hint=_choice(lines))
    names = {line.number: names_of(line, lines) for line in lines}
    whole = [line for line in lines if wanted in names[line.number]]
    fitting = whole or [line for line in lines if any(wanted in name for name in names[line.number])]
    if len(fitting) == 1:
        return fitting[0]
    shown = plain(text.strip())
    if not fitting:
        raise DriveUnknown(f"no drive is called {shown}", hint=_choice(lines))
    raise DriveUnknown(f"{shown} could be more than one drive", hint=_choice(fitting))


def names_of(line: DriveLine, lines: Iterable[DriveLine]) -> frozenset[str]:
    """Every whole name that means a drive among all drives, case folded."""
    who = line.drive.identity
    names = [who.serial, who.wwn, line.label]
    if all(other is line or _last_seen(other) < _last_seen(line) for other in _sharing(line, lines)):
        device = line.place.device
        names += [device, device.removeprefix("/dev/")]
    return frozenset(name.casefold() for name in names if name)


def _sharing(line: DriveLine, lines: Iterable[DriveLine]) -> list[DriveLine]:
    return [other for other in lines if other.place.device == line.place.device]


def _last_seen(line: DriveLine) -> tuple[bool, int]:
    last = line.last_pass
    if last is None:
        return True, line.first_seen
    return last.outcome is not Outcome.ABSENT, last.at


def _choice(lines: Sequence[DriveLine]) -> str:
    if not lines:
        return "no drive has been seen yet"
    named = [_called(line) for line in lines[:_MOST_NAMED]]
    more = len(lines) - len(named)
    return "there is " + ", ".join(named) + (f" and {more} more" if more else "")


def _called(line: DriveLine) -> str:
    who = line.drive.identity
    about = [f"serial {who.serial}" if who.serial else "", f"label {line.label}" if line.label else ""]
    told = ", ".join(word for word in about if word)
    device = line.place.device
    return plain(f"{device} ({told})" if told else device)
