"""Where scenarios are, and reading them.

In the repository they lie in ``fixtures/scenarios/``; the installed package carries them as its own data, in
``diskwatch/rehearsal/scenarios/``. An owner may name a file anywhere.
"""

import difflib
from collections.abc import Iterator, Mapping
from pathlib import Path

import msgspec

from diskwatch.errors import UsageError
from diskwatch.rehearsal.happenings import BlocksFail, HeadWeakens, Scratch
from diskwatch.rehearsal.scenario import MARK, Scenario
from diskwatch.units import plain

DEFAULT = "scratched-media"
"""The scenario where none is named."""

_PACKAGED = Path(__file__).parent / "scenarios"
_IN_REPOSITORY = Path(__file__).parents[2] / "fixtures" / "scenarios"


def folder() -> Path:
    """Where the scenarios of the program lie."""
    return _PACKAGED if _PACKAGED.is_dir() else _IN_REPOSITORY


def names() -> tuple[str, ...]:
    """Names of the program's scenarios, in order."""
    return tuple(sorted(path.stem for path in folder().glob("*.toml")))


def listed() -> Mapping[str, Scenario]:
    """The program's scenarios by name."""
    return {name: load(name) for name in names()}


def load(name: str) -> Scenario:
    """Read a scenario.

    Args:
        name: one of `names`, or the path of a file (anything with a slash, or ending in ``.toml``).

    Raises:
        UsageError: there is none of that name, or the file is wrong; names file, key and what was expected.
    """
    if "/" in name or name.endswith(".toml"):
        return _read(Path(name))
    known = names()
    if name not in known:
        near = difflib.get_close_matches(name, known, n=1)
        hint = f"did you mean {near[0]}?" if near else "see 'diskwatch rehearse --list'"
        raise UsageError(f"there is no scenario {name!r}", hint=hint)
    return _read(folder() / f"{name}.toml")


def _read(path: Path) -> Scenario:
    try:
        scenario = msgspec.toml.decode(path.read_bytes(), type=Scenario)
    except OSError as error:
        raise UsageError(f"{path}: cannot be read: {error.strerror}") from error
    except msgspec.ValidationError as error:
        raise UsageError(f"{path}: {error}", hint="README.md beside the scenarios tells every key") from error
    except (msgspec.DecodeError, UnicodeDecodeError) as error:
        raise UsageError(f"{path}: is no TOML: {error}") from error
    for fault in faults(scenario):
        raise UsageError(f"{path}: {fault}")
    return scenario


def faults(scenario: Scenario) -> Iterator[str]:
    """What is wrong with a scenario beyond the types of its keys, one sentence each."""
    yield from _names(scenario)
    yield from _events(scenario)
    serials = {drive.serial for drive in scenario.drive}
    for wish in scenario.expect:
        if wish.drive and wish.drive not in serials:
            yield f"an expectation names the drive {plain(wish.drive)}, which is not there"
        if wish.call is None and wish.stays is None and not wish.never_cause:
            yield "an expectation asks for nothing: give it a call, stays or never_cause"
        if wish.call is not None and wish.by_day is None:
            yield f"an expectation of the call {wish.call.value} needs by_day"


def _names(scenario: Scenario) -> Iterator[str]:
    """Names that stand twice, or that do not say that they are invented."""
    for what in ("serial", "device", "bay"):
        every = [getattr(drive, what) for drive in scenario.drive]
        for one in sorted({one for one in every if every.count(one) > 1}):
            yield f"two drives have the {what} {plain(one)}; each needs its own"
    for drive in scenario.drive:
        if not drive.serial.startswith(MARK):
            yield f"the serial {plain(drive.serial)} does not begin with {MARK}, as every invented one must"
        if MARK not in drive.model:
            yield f"the model {plain(drive.model)} does not contain {MARK}, as every invented one must"


def _events(scenario: Scenario) -> Iterator[str]:
    """Events of what is not there, or of a drive of another sort."""
    bays = {drive.bay for drive in scenario.drive} | {bay.name for bay in scenario.bay}
    strips = {"wall"} | {bay.strip for bay in scenario.bay}
    turning = {drive.serial for drive in scenario.drive if drive.kind == "hdd"}
    every = {drive.serial for drive in scenario.drive}
    for event in scenario.event:
        for key, known in (("drive", every), ("bay", bays), ("to", bays), ("strip", strips)):
            named = getattr(event, key, None)
            if named is not None and named not in known:
                yield (
                    f"an event of day {event.day:g} names the {key} {plain(named)}; "
                    f"known are: {plain(', '.join(sorted(known)))}"
                )
        if isinstance(event, Scratch | HeadWeakens) and event.drive not in turning:
            yield f"an event of day {event.day:g} needs a hard disk, and {plain(event.drive)} is none"
        if isinstance(event, BlocksFail) and event.drive in turning:
            yield f"an event of day {event.day:g} needs a solid-state drive, and {plain(event.drive)} is none"
