"""Where scenarios are, and reading them.

In the repository they lie in ``fixtures/scenarios/``; the installed package carries them as its own data, in
``diskwatch/rehearsal/scenarios/``. An owner may name a file anywhere.
"""

import difflib
import re
import tomllib
from collections.abc import Collection, Iterator, Mapping
from pathlib import Path

import msgspec

from diskwatch.errors import UsageError
from diskwatch.rehearsal import checked
from diskwatch.rehearsal.happenings import BlocksFail, Dies, HeadWeakens, Moved, Scratch, Vanishes
from diskwatch.rehearsal.hours import begins_ever
from diskwatch.rehearsal.scenario import MARK, Expectation, Scenario
from diskwatch.units import plain

DEFAULT = "scratched-media"
"""The scenario where none is named."""

_LARGEST_FILE = 1_000_000
_HINT = "README.md beside the scenarios tells every key"

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
        if not path.is_file() and path.exists():
            raise UsageError(f"{path}: is no file")
        with path.open("rb") as opened:
            text = opened.read(_LARGEST_FILE + 1)
        if len(text) > _LARGEST_FILE:
            raise UsageError(f"{path}: is larger than a scenario can be ({_LARGEST_FILE} bytes)")
        tables = tomllib.loads(text.decode())
    except OSError as error:
        raise UsageError(f"{path}: cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise UsageError(f"{path}: is no TOML: byte {error.start + 1} is no UTF-8") from error
    except (ValueError, RecursionError) as error:  # TOML's own errors are among the first sort
        raise UsageError(f"{path}: is no TOML: {_reason(error)}") from error
    wrong = checked.fault(tables, Scenario)
    if wrong is not None:
        raise UsageError(f"{path}: {wrong}", hint=_HINT)
    scenario = msgspec.convert(tables, Scenario)
    for fault in faults(scenario):
        raise UsageError(f"{path}: {fault}", hint=_HINT)
    return scenario


def _reason(error: Exception) -> str:
    """Why a text is no TOML, the place first."""
    told = re.fullmatch(r"(?P<why>.*) \(at (?P<where>.*)\)", str(error), re.DOTALL)
    if told is None:
        return "something in it is too long or too deep"
    why = told["why"]
    return f"{told['where']}: {why[:1].lower()}{why[1:]}"


def faults(scenario: Scenario) -> Iterator[str]:
    """What is wrong with a scenario beyond the types of its keys, one sentence each."""
    yield from _names(scenario)
    yield from _events(scenario)
    yield from _moves(scenario)
    yield from _hours(scenario)
    serials = {drive.serial for drive in scenario.drive}
    for place, wish in enumerate(scenario.expect, 1):
        for fault in _wishes(wish, serials):
            yield f"[[expect]] {place}{fault}"


def _wishes(wish: Expectation, serials: Collection[str]) -> Iterator[str]:
    """What is wrong with an expectation, behind its place in the file."""
    if wish.drive and wish.drive not in serials:
        yield f", drive: there is no {plain(wish.drive)}"
    if wish.call is None and wish.stays is None and wish.foretells is None and not wish.never_cause:
        yield ": asks for nothing; give it a call, foretells, stays or never_cause"
    if wish.foretells is not None and wish.call is not None:
        yield ", foretells: goes without a call; give each an expectation of its own"
    if wish.foretells is not None and wish.by_day is None:
        yield ", by_day: is missing; what is foretold should be said by then"
    if wish.call is None and wish.cause is not None:
        yield ", cause: goes with a call; give it one"
    if wish.call is not None and wish.by_day is None:
        yield f", by_day: is missing; the call {wish.call.value} should be reached by then"
    if wish.by_day is not None and wish.by_day < wish.from_day:
        yield f", by_day: {wish.by_day:g} lies before from_day, {wish.from_day:g}"
    if wish.call is not None and wish.stays is not None and wish.stays.rank < wish.call.rank:
        yield f", stays: {wish.stays.value} rules out the call {wish.call.value} that is asked for"


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
        if ("nvme" in drive.device) is not (drive.kind == "nvme"):
            named = "/dev/nvme0" if drive.kind == "nvme" else "/dev/sda"
            yield f"the device {plain(drive.device)} is none of kind {drive.kind}, as {named} would be"
    if MARK.lower() not in scenario.place.lower():
        yield f"the place {plain(scenario.place)} does not say that it is {MARK.lower()}"


def _events(scenario: Scenario) -> Iterator[str]:
    """Events of what is not there, or of a drive of another sort."""
    bays = {drive.bay for drive in scenario.drive} | {bay.name for bay in scenario.bay}
    strips = {"wall", scenario.strip} | {bay.strip for bay in scenario.bay}
    turning = {drive.serial for drive in scenario.drive if drive.kind == "hdd"}
    every = {drive.serial for drive in scenario.drive}
    joins = {drive.serial: drive.joins_day for drive in scenario.drive}
    for event in scenario.event:
        for key, known in (("drive", every), ("bay", bays), ("to", bays), ("strip", strips)):
            named = getattr(event, key, None)
            if named is not None and named not in known:
                yield (
                    f"an event of day {event.day:g} names the {key} {plain(named)}; "
                    f"known are: {plain(', '.join(sorted(known)))}"
                )
        serial = getattr(event, "drive", "")
        if event.day < joins.get(serial, 0.0):
            yield f"an event of day {event.day:g} befalls {plain(serial)} before it joins"
        if isinstance(event, Scratch | HeadWeakens) and event.drive not in turning:
            yield f"an event of day {event.day:g} needs a hard disk, and {plain(event.drive)} is none"
        if isinstance(event, BlocksFail) and event.drive in turning:
            yield f"an event of day {event.day:g} needs a solid-state drive, and {plain(event.drive)} is none"


def _moves(scenario: Scenario) -> Iterator[str]:
    """Drives that are moved to where another one is; one that is gone for ever has left its bay."""
    holds = {drive.serial: drive.bay for drive in scenario.drive}
    for event in sorted(scenario.event, key=lambda one: one.day):
        if isinstance(event, Dies) or (isinstance(event, Vanishes) and event.days == 0):
            holds.pop(event.drive, None)
        elif isinstance(event, Moved):
            there = next((one for one, bay in holds.items() if bay == event.to and one != event.drive), None)
            if there is not None:
                yield (
                    f"an event of day {event.day:g} moves {plain(event.drive)} to {plain(event.to)}, "
                    f"where {plain(there)} is; expected a bay that is free then"
                )
            holds[event.drive] = event.to


def _hours(scenario: Scenario) -> Iterator[str]:
    """An hour of backups and self-tests at which the machine is never on, so that none would ever begin."""
    wanting = [
        f"{key} of {plain(drive.serial)}"
        for drive in scenario.drive
        for key, wanted in (
            ("backup", drive.backup != "none"),
            ("self_tests_days", drive.self_tests_days > 0),
        )
        if wanted
    ]
    if not wanting or begins_ever(scenario, scenario.backup_hour):
        return
    hours = ", ".join(str(hour) for hour in range(24) if begins_ever(scenario, hour)) or "no hour of such days"
    yield (
        f"backup_hour: expected one at which a machine of the habit {scenario.habit} is on ({hours}), "
        f"not {scenario.backup_hour}; {' and '.join(wanting)} would do nothing"
    )
