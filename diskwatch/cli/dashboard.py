"""Watches the drives of a few workstations and says what to do, and by when, before files are lost.

Without a command it opens the dashboard over this machine's drives. Where nobody watches and the history can be
written it also watches, for as long as the dashboard is open; else it says that nobody is watching.
"""

import argparse
import contextlib
import os
import select
import subprocess
import sys
import threading
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path

from diskwatch.cli.common import now, settings, state_folder, talk
from diskwatch.cli.endangered import Warner
from diskwatch.cli.shown import Shown
from diskwatch.errors import HistoryError, NothingToWorkOn
from diskwatch.history.lock import watcher
from diskwatch.history.opening import refuse_foreign
from diskwatch.history.reader import Past
from diskwatch.places import HISTORY, is_there
from diskwatch.records import Bays
from diskwatch.rehearsal.state import holds_rehearsal

_STARTING = 5.0
"""Seconds that the child may take to begin."""

_PATIENCE = 10.0
"""Seconds that the watching child gets to store everything and end."""


def options(parser: argparse.ArgumentParser) -> None:
    """No options of its own."""


def run(args: argparse.Namespace) -> int:
    """Open the dashboard; 0 when it was closed. Without a full terminal the drives are listed instead."""
    owner = settings(args)
    folder = state_folder(args)
    if not is_full_screen():
        talk("diskwatch: this is no full-screen terminal; 'diskwatch bays' shows the same as text")
        args.json, args.code, args.join = False, False, []
        from diskwatch.cli import bays  # noqa: PLC0415 - the screen's first frame does not wait for it

        return bays.run(args)
    threading.Thread(target=end_with_terminal, name="terminal", daemon=True).start()
    # Textual takes a quarter of a second to load: the child reads the drives meanwhile.
    with _watching(folder, args) as (told, starting):
        from diskwatch.dashboard.app import Dashboard  # noqa: PLC0415

        with contextlib.ExitStack() as stack:
            source = Source(folder, stack, starting=starting)
            Dashboard(
                source,
                now,
                watching=told,
                every=int(owner.smart.every),
                ascii_only=not speaks_more_than_ascii(),
                braille=has_braille(),
                questions=Shown(source.past, folder, owner),
                steady=time.monotonic,
            ).run()
    return 0


def end_with_terminal(last: Callable[[], object] | None = None) -> None:
    """End at once when the terminal is gone.

    Where it is not the controlling terminal (under ``su -c``, say) no signal tells, and the full-screen
    library would go on reading an end of file for ever. The watching child ends with its standard input.

    Args:
        last: what must still be done, since nothing is unwound; it must come to an end.
    """
    hang_up = select.poll()
    hang_up.register(sys.stdin.fileno(), 0)
    gone = select.POLLHUP | select.POLLERR | select.POLLNVAL
    while not any(event & gone for _, event in hang_up.poll()):
        pass
    try:
        if last is not None:
            last()
    finally:
        os._exit(0)


class Source:
    """The history, opened once it is there and kept open between two looks."""

    def __init__(self, folder: Path, stack: contextlib.ExitStack, *, starting: int | None) -> None:
        """Open nothing yet; ``starting`` is the process that is about to watch, if there is one."""
        self._folder = folder
        self._stack = stack
        self._starting = starting
        self._begun = time.monotonic()
        self._past: Past | None = None
        self._warn = Warner(folder)

    def __call__(self, at: int) -> Bays:
        """The drives at a time, UTC seconds since 1970."""
        bays = self._now(at)
        if bays.watcher is None and self._starting is not None and time.monotonic() - self._begun < _STARTING:
            # The child is loading its libraries; that nobody watches would be said for a second only.
            return replace(bays, watcher=self._starting)
        return bays

    def _now(self, at: int) -> Bays:
        try:
            past = self.past()
        except NothingToWorkOn:
            # Nothing has been stored yet, which is no error while somebody is about to.
            return Bays(at=at, watcher=watcher(self._folder), drives=())
        return self._warn(past.bays(at))

    def past(self) -> Past:
        """The history itself.

        Raises:
            NothingToWorkOn: there is none yet.
        """
        if self._past is None:
            self._past = self._stack.enter_context(Past.open(self._folder))
        return self._past


@contextlib.contextmanager
def _watching(folder: Path, args: argparse.Namespace) -> Iterator[tuple[str, int | None]]:
    """Watch through a child where nobody does; gives the sentence that says who watches, and the child."""
    holder = watcher(folder)
    if holder is not None:
        yield f"the watch of process {holder}", None
        return
    if not _may_write(folder):
        yield f"nobody is watching, and the history in {folder} cannot be written by you", None
        return
    if holds_rehearsal(folder):
        yield "a rehearsal is kept here: its drives are invented, and nobody watches them", None
        return
    command = [sys.executable, "-m", "diskwatch", "watch", "--tied", "--state", str(folder)]
    if args.settings is not None:
        command += ["--settings", args.settings]
    with subprocess.Popen(
        command, stdin=subprocess.PIPE, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
    ) as child:
        try:
            yield "watching from here, as long as this stays open", child.pid
        finally:
            if child.stdin is not None:
                child.stdin.close()
            try:
                child.wait(_PATIENCE)
            except subprocess.TimeoutExpired:
                child.kill()


def _may_write(folder: Path) -> bool:
    """Whether the history can be written, or made where there is none yet."""
    try:
        refuse_foreign(folder / HISTORY)
    except HistoryError:
        return False  # the screen tells why, when it cannot read it either
    place = folder
    while not is_there(place):
        place = place.parent
    return os.access(place, os.W_OK | os.X_OK)


def is_full_screen() -> bool:
    """Whether this terminal can show more than lines that follow each other."""
    return sys.stdout.isatty() and sys.stdin.isatty() and os.environ.get("TERM", "dumb") != "dumb"


def has_braille() -> bool:
    """Whether the terminal's font may have Braille patterns; the console's has none (from memory)."""
    return os.environ.get("TERM") != "linux"


def speaks_more_than_ascii() -> bool:
    """Whether the terminal's letters go beyond ASCII."""
    return (sys.stdout.encoding or "").casefold().replace("-", "") in {"utf8", "utf16", "utf32"}
