"""What the owner may set, typed, from one TOML file.

A mistake is told by file, key, what was found and what is expected; for a key that does not exist the nearest
one that does. ``example.toml`` in the package holds every key with its meaning; a test keeps it complete.
"""

import difflib
import re
from pathlib import Path
from typing import Annotated, Any, Literal, get_args

import msgspec

from diskwatch.errors import SettingsError
from diskwatch.units import seconds_of


class Duration(int):
    """A length of time in whole seconds, written ``1s``, ``30m``, ``2h`` or ``7d`` in the file."""


class QuietHours(str):
    """Hours in which notices wait, local time, written ``22:00-07:00``; empty for none."""

    __slots__ = ()


class _Section(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A table of the file: unknown keys are refused."""


_Argv = tuple[Annotated[str, msgspec.Meta(min_length=1)], ...]


class Smart(_Section, frozen=True, kw_only=True):
    """How drives are asked.

    Attributes:
        command: the smartctl command, a path or a name to be found on PATH.
        every: time between two rounds of readings.
        timeout: how long one drive may take to answer before it is given up for this round.
    """

    command: Annotated[str, msgspec.Meta(min_length=1)] = "smartctl"
    every: Duration = Duration(1_800)
    timeout: Duration = Duration(60)


class Io(_Section, frozen=True, kw_only=True):
    """How traffic is counted.

    Attributes:
        every: time between two looks at the kernel's counters.
    """

    every: Duration = Duration(10)


class KernelLog(_Section, frozen=True, kw_only=True):
    """Where the kernel speaks.

    Attributes:
        source: ``/dev/kmsg``, or a file in its record format.
    """

    source: Annotated[str, msgspec.Meta(min_length=1)] = "/dev/kmsg"


class HistoryKeeping(_Section, frozen=True, kw_only=True):
    """How the history is kept.

    Attributes:
        commit: traffic is written this often; readings are written at once.
        backup: how often a copy of the history is laid beside it.
    """

    commit: Duration = Duration(900)
    backup: Literal["never", "daily", "weekly"] = "weekly"


class Watch(_Section, frozen=True, kw_only=True):
    """Which drives are watched; a drive is named by serial, WWN or device.

    Attributes:
        only: watch these and no others; empty means all.
        ignore: leave these alone altogether.
    """

    only: tuple[str, ...] = ()
    ignore: tuple[str, ...] = ()


class Notices(_Section, frozen=True, kw_only=True):
    """How people are told.

    Attributes:
        command: a program and its arguments that gets each notice as JSON on standard input; never a shell.
        quiet: hours in which only a ``retire`` speaks.
        terminal: a program and its arguments that opens a terminal to show the dashboard in.
        monthly: whether to say once a month that all is quiet and somebody is watching.
    """

    command: _Argv = ()
    quiet: QuietHours = QuietHours()
    terminal: _Argv = ()
    monthly: bool = False


class Probe(_Section, frozen=True, kw_only=True):
    """Timing a few reads a day of turning disks that are awake and idle, 2 seconds of disk time at most.

    Attributes:
        enabled: whether to do so at all.
    """

    enabled: bool = False


class SelfTests(_Section, frozen=True, kw_only=True):
    """Self-tests that the drives are asked to run; none unless set.

    Attributes:
        short: time between two short tests of a drive, or absent for none.
        long: time between two extended tests of a drive, or absent for none.
    """

    short: Duration | None = None
    long: Duration | None = None


class Settings(_Section, frozen=True, kw_only=True):
    """All settings; each table and each key may be absent."""

    smart: Smart = Smart()
    io: Io = Io()
    kernel_log: KernelLog = KernelLog()
    history: HistoryKeeping = HistoryKeeping()
    watch: Watch = Watch()
    notices: Notices = Notices()
    probe: Probe = Probe()
    selftest: SelfTests = SelfTests()


def load(path: Path | None) -> Settings:
    """Read a settings file.

    Args:
        path: the file, or None for the defaults.

    Raises:
        SettingsError: the file cannot be read, is no TOML, or has a wrong key or value; one line that names the
            file, the key, what was found and what is expected.
    """
    if path is None:
        return Settings()
    try:
        if not path.is_file() and path.exists():
            raise SettingsError(f"{path}: is no file")
        return _decode(path.read_bytes())
    except OSError as error:
        raise SettingsError(f"{path}: cannot be read: {error.strerror}") from error
    except msgspec.ValidationError as error:
        raise SettingsError(f"{path}: {_told(str(error))}") from error
    except (msgspec.DecodeError, RecursionError, ValueError) as error:
        raise SettingsError(f"{path}: is no TOML: {error}") from error


def _decode(text: bytes) -> Settings:
    return msgspec.toml.decode(text, type=Settings, dec_hook=_hook)


def _hook(wanted: type, found: Any) -> Any:
    if wanted is Duration:
        if not isinstance(found, str):
            raise ValueError(f"expected a duration such as 1s, 30m, 2h or 7d, not {found!r}")
        return Duration(seconds_of(found))
    if wanted is QuietHours:
        if not isinstance(found, str) or not re.fullmatch(
            r"(([01]\d|2[0-3]):[0-5]\d-([01]\d|2[0-3]):[0-5]\d)?", found
        ):
            raise ValueError(f"expected hours such as 22:00-07:00, or nothing, not {found!r}")
        return QuietHours(found)
    raise NotImplementedError


_TOML_WORDS = {
    "str": "a string",
    "array": "a list",
    "object": "a table",
    "int": "a whole number",
    "float": "a number",
    "bool": "true or false",
}
_UNKNOWN = re.compile(r"Object contains unknown field `(?P<key>[^`]*)`(?: - at `\$\.?(?P<where>[^`]*)`)?")
_WRONG = re.compile(r"(?P<what>.*?)(?: - at `\$\.?(?P<where>[^`]*)`)?", re.DOTALL)


def _told(message: str) -> str:
    """The library's message in our words: the key first, then what is expected."""
    unknown = _UNKNOWN.fullmatch(message)
    if unknown is not None:
        return _told_unknown(unknown["key"], unknown["where"] or "")
    wrong = _WRONG.fullmatch(message)
    what, where = (wrong["what"], wrong["where"] or "") if wrong is not None else (message, "")
    where = where.partition("[")[0]  # of a list the key is named, not the place in it
    return f"{_key_name(where) or 'the file'}: {_expectation(what, where)}"


def _expectation(what: str, where: str) -> str:
    """What was expected and found, in the words of TOML; of a choice, all that may be chosen."""
    chosen = re.fullmatch(r"Invalid enum value ('.*')", what)
    if chosen is not None:
        table, _, key = where.partition(".")
        field = next(one for one in msgspec.structs.fields(_TABLES[table]) if one.name == key)
        return f"expected one of {', '.join(sorted(get_args(field.type)))}, not {chosen[1]}"
    for name, said in _TOML_WORDS.items():
        what = what.replace(f"`{name}`", said)
    return f"{what[:1].lower()}{what[1:]}"


def _told_unknown(key: str, where: str) -> str:
    table = _TABLES.get(where)
    known = sorted(_keys(table) if table is not None else _TABLES)
    near = difflib.get_close_matches(key, known, n=1, cutoff=0.4)
    elsewhere = [f"[{name}] {key}" for name, fields in _TABLES.items() if key in _keys(fields)]
    if near:
        hint = f"did you mean {near[0]}?"
    elif elsewhere:
        hint = f"did you mean {elsewhere[0]}?"
    else:
        hint = f"known are: {', '.join(known)}"
    name = f"[{where}] {key}" if where else key
    return f"{name}: no such {'key' if where else 'table or key'}; {hint}"


def _key_name(where: str) -> str:
    """``smart.every`` as it stands in the file: ``[smart] every``."""
    table, _, key = where.partition(".")
    return f"[{table}] {key}" if key else (f"[{table}]" if table else "")


def _keys(table: type[msgspec.Struct]) -> tuple[str, ...]:
    return tuple(field.name for field in msgspec.structs.fields(table))


_TABLES: dict[str, type[msgspec.Struct]] = {
    field.name: field.type for field in msgspec.structs.fields(Settings)
}
