"""The command line: parse, call, print; the only place that joins all rooms.

Data go to standard output, talk and errors to standard error, one line an error. A command's module is imported
only when it is asked for, so that a quick question stays quick.
"""

import argparse
import contextlib
import difflib
import importlib
import io
import os
import sys
from collections.abc import Sequence
from typing import NoReturn

from diskwatch import __version__
from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.units import plain

COMMANDS = {
    "watch": "watch the drives in the foreground; with --once one full pass, then end",
    "bays": "the drives, where they are, what to do with each, and why",
    "why": "the chain from a drive's readings to its call, and what would change it",
    "copy-plan": "what is at stake on a drive, and how to get it off: how long, in which order",
    "outlook": "what is to be expected of the drives within 24 months, and what nobody can know",
    "daybook": "what happened to the drives, in order",
    "ticket": "what a help desk or a warranty desk needs to act on a drive without asking back",
    "ticket-check": "whether a ticket is whole and unchanged; every fault is named",
    "replay": "recorded readings through the same analyser: what it would have said, and when",
    "rehearse": "an invented machine whose drives live through years in seconds, judged like a real one",
    "preflight": "what is missing on this machine for a full watch, each with its cure",
    "tell": "tell what you know of a drive: its label, its warranty, its last backup",
    "settle": "say what was done about a drive: the cable was changed, the drive replaced",
    "point": "which drive is it: label, serial, port, and a blinking light",
    "move-history": "move the history to another folder, off a drive in trouble",
    "notify": "tell you on your desktop, and through a program of yours, when a drive's call changes",
    "greet": "one line for a login shell: what the drives ask for",
    "later": "put the notices of one drive off, for you alone",
    "install": "lay the service on this machine: an environment of its own and the units for systemd",
    "uninstall": "take the service away; the history stays",
    "export-history": "the past of drives, to a file that can travel",
    "import-history": "take in the past of drives from such a file",
}
"""Every command with what it does; its module in this room bears its name."""

_STATE = "folder of the history (default: the system's, else your own state folder)"
"""What --state means; a command for which it means something else says so in a `STATE` of its own."""

_SETTINGS = "settings file (TOML)"

_ALONE = "dashboard"
"""The module of the bare command."""


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line.

    Args:
        argv: the words behind the program's name; None for those it was started with.

    Returns:
        The exit code: 0 done, 2 wrong usage or settings, 3 nothing to work on, 4 could not read or write;
        what else a command may return it says itself.
    """
    words = list(sys.argv[1:] if argv is None else argv)
    _take_any_letter()
    try:
        name, words = _chosen(words)
        module = importlib.import_module(f"diskwatch.cli.{name.replace('-', '_')}")
        state, settings = getattr(module, "STATE", _STATE), getattr(module, "SETTINGS", _SETTINGS)
        parser = _parser(name, module.__doc__ or "", state=state, settings=settings)
        module.options(parser)
        code = int(module.run(parser.parse_args(words)))
        sys.stdout.flush()
        return code
    except DiskwatchError as error:
        _complain(str(error))
        return error.exit_code
    except KeyboardInterrupt:
        return 130
    except BrokenPipeError:
        # Whoever read our output has gone: there is nobody to say anything to.
        _write_no_more()
        return 0
    except OSError as error:
        _write_no_more()
        _complain(f"cannot read or write: {error}")
        return DiskwatchError.exit_code


def _take_any_letter() -> None:
    """Let no letter that a terminal cannot show, and no missing stream, end a command."""
    for name, mode in (("stdin", "r"), ("stdout", "w"), ("stderr", "w")):
        stream = getattr(sys, name)
        if stream is None:
            setattr(sys, name, open(os.devnull, mode, encoding="utf-8"))  # noqa: SIM115, PTH123 - for the process's life
        elif isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def _write_no_more() -> None:
    """Keep the interpreter from trying to write once more at its end what could not be written."""
    with contextlib.suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _chosen(words: list[str]) -> tuple[str, list[str]]:
    """The command's module and the words that are left for it."""
    if not words or words[0].startswith("-"):
        return _ALONE, words
    name = words[0]
    if name in COMMANDS:
        return name, words[1:]
    near = difflib.get_close_matches(name, COMMANDS, n=1)
    hint = f"did you mean {near[0]}?" if near else f"known are: {', '.join(COMMANDS)}"
    raise UsageError(f"there is no command {name!r}", hint=hint)


class _Parser(argparse.ArgumentParser):
    """Says what is wrong in one line, as every other error is said."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(message, hint=f"see '{self.prog} --help'")


def _parser(name: str, about: str, *, state: str, settings: str) -> argparse.ArgumentParser:
    alone = name == _ALONE
    parser = _Parser(
        prog="diskwatch" if alone else f"diskwatch {name}",
        description=about.strip(),
        formatter_class=argparse.RawDescriptionHelpFormatter,
        epilog=_listed() if alone else None,
        allow_abbrev=False,
    )
    parser.add_argument("--state", metavar="DIR", help=state)
    parser.add_argument("--settings", metavar="FILE", help=settings)
    if alone:
        parser.add_argument("--version", action="version", version=f"diskwatch {__version__}")
    return parser


def _listed() -> str:
    lines = [f"  {name:<14} {about}" for name, about in COMMANDS.items()]
    return "\n".join(["commands (each has its own --help):", *lines])


def _complain(text: str) -> None:
    print(f"diskwatch: {plain(text)}", file=sys.stderr)
