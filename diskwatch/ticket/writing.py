"""A ticket as text, and a file put in place whole."""

import contextlib
import json
import os
import secrets
from pathlib import Path

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.units import plain, without_active


def text_of(document: object) -> str:
    """A document as JSON for people and programs; what a terminal may act on stands as JSON's own escapes.

    Each member of a ticket begins a line, and each item of a list in it: to indent all, the standard library
    takes a way that is ten times as long.
    """
    return without_active(_lines(document, 3) + "\n", _escaped)


def _lines(thing: object, depth: int) -> str:
    if depth and isinstance(thing, dict) and thing:
        members = (
            f"{json.dumps(key, ensure_ascii=False)}: {_lines(value, depth - 1)}" for key, value in thing.items()
        )
        return "{\n" + ",\n".join(members) + "\n}"
    if depth and isinstance(thing, list) and thing:
        return (
            "[\n" + ",\n".join(_lines(one, depth - 1 if isinstance(one, dict) else 0) for one in thing) + "\n]"
        )
    return json.dumps(thing, ensure_ascii=False, allow_nan=False)


def _escaped(letter: str) -> str:
    return json.dumps(letter)[1:-1] if ord(letter) != 0x7F else "\\u007f"


def put(path: Path, text: str, *, force: bool) -> None:
    """Put a file in place whole, or leave everything as it was.

    Args:
        path: where.
        text: what it is to hold.
        force: whether a file that is there may be replaced.

    Raises:
        UsageError: something is there already and may not be replaced.
        DiskwatchError: it cannot be written.
    """
    taken = UsageError(f"{plain(str(path))} is there already", hint="name another file, or add --force")
    if os.path.lexists(path) and (not force or path.is_dir()):
        raise taken
    try:
        making = path.parent / f".diskwatch-{os.getpid()}-{secrets.token_hex(8)}"
        try:
            with making.open("x", encoding="utf-8", newline="") as file:
                file.write(text)
                file.flush()
                os.fsync(file.fileno())
            if force:
                making.replace(path)
            else:
                # A link is made only where nothing is: what came in between is not written over.
                _linked(making, path)
        finally:
            with contextlib.suppress(FileNotFoundError):
                making.unlink()
    except FileExistsError:
        raise taken from None
    except OSError as error:
        raise DiskwatchError(f"{plain(str(path))} cannot be written: {error.strerror}") from error


def _linked(making: Path, path: Path) -> None:
    try:
        os.link(making, path)
    except FileExistsError:
        raise
    except OSError:
        # A file system without links: the look before is all that can be had.
        if os.path.lexists(path):
            raise FileExistsError(path) from None
        making.replace(path)
