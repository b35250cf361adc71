"""What the commands share: where things are, which machine this is, how answers are written."""

import argparse
import json
import sys
import time
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Self

from diskwatch import places
from diskwatch.units import plain, without_active

if TYPE_CHECKING:
    from diskwatch.settings import Settings

_EXACT = 2**53


def now() -> int:
    """The present, UTC seconds since 1970."""
    return int(time.time())


def state_folder(args: argparse.Namespace) -> Path:
    """Where the history lies."""
    return places.state_folder(args.state)


def settings(args: argparse.Namespace) -> "Settings":
    """The owner's settings.

    Raises:
        SettingsError: a file was named, or found, and is wrong.
    """
    from diskwatch import settings as settings_room  # noqa: PLC0415 - commands that only read load in half the time

    path = places.settings_file(args.settings)
    return settings_room.load(path)


def drive_option(parser: argparse.ArgumentParser) -> None:
    """The drive that a command is about."""
    parser.add_argument(
        "drive", metavar="DRIVE", help="serial, WWN, device, label, or an unambiguous part of one"
    )


def talk(text: str) -> None:
    """One line to the person at the terminal, beside the data."""
    print(plain(text), file=sys.stderr)


def print_json(answer: Mapping[str, object]) -> None:
    """One JSON object to standard output; integers that JSON readers cannot hold exactly become strings."""
    text = json.dumps(_exact(answer), indent=2, ensure_ascii=False, allow_nan=False)
    # What JSON may hold raw, a terminal may act on: such letters are written as JSON's own escapes.
    sys.stdout.write(without_active(text, lambda letter: f"\\u{ord(letter):04x}") + "\n")
    sys.stdout.flush()


class Bar:
    """How far a long piece of work is, on a terminal only; it leaves nothing behind."""

    _WIDTH = 40

    def __init__(self, what: str, *, quiet: bool = False) -> None:
        """Name what is being done; quiet where somebody else draws on the terminal."""
        self._what = what
        self._quiet = quiet
        self._shown = False

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        if self._shown:
            sys.stderr.write("\r" + " " * (len(self._what) + self._WIDTH + 12) + "\r")
            sys.stderr.flush()

    def show(self, done: int, total: int) -> None:
        """So much of so much is done."""
        if self._quiet or not sys.stderr.isatty() or total <= 0:
            return
        share = min(1.0, done / total)
        full = round(share * self._WIDTH)
        sys.stderr.write(f"\r{self._what}  {'=' * full}{'.' * (self._WIDTH - full)}  {share:4.0%}")
        sys.stderr.flush()
        self._shown = True


def _exact(thing: object) -> object:
    if thing is None or isinstance(thing, str | float | bool):
        return thing
    if isinstance(thing, int):
        return thing if -_EXACT <= thing <= _EXACT else str(thing)
    if isinstance(thing, Mapping):
        return {key: _exact(value) for key, value in thing.items()}
    if isinstance(thing, Sequence):
        return [_exact(value) for value in thing]
    return thing
