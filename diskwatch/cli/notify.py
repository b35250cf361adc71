"""Tell people about their drives: on this user's desktop, and through a program of the owner's.

It looks at the history now and then and says when a drive's call changes; what stands is said again, more often
the worse it is, until it is put off. It watches no drive itself and needs no rights beyond reading the history.
SIGHUP makes it read its settings again.
"""

import argparse
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from functools import partial
from pathlib import Path

from diskwatch import places
from diskwatch.cli.answers import drive_answer
from diskwatch.cli.common import now, settings, state_folder, talk
from diskwatch.errors import DiskwatchError, NothingToWorkOn, SettingsError
from diskwatch.notices import hook, wording
from diskwatch.notices.agent import Agent, Ways, notice
from diskwatch.notices.desktop import Desktop
from diskwatch.notices.guard import alone
from diskwatch.notices.policy import Wishes, minutes_of
from diskwatch.notices.sight import look
from diskwatch.notices.waiting import Waiting
from diskwatch.settings import Settings

EVERY = 30.0
"""Seconds between two looks: a notice is to be on the screen within a minute of the round that caused it."""

_ENDS = (signal.SIGTERM, signal.SIGINT)

_TERMINALS = (("x-terminal-emulator", "-e"), ("xterm", "-e"))
"""What opens a terminal where the settings name nothing: Debian's own alternative first."""


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--try", dest="trial", action="store_true", help="send one trial notice, then end")
    parser.add_argument(
        "--no-desktop",
        action="store_true",
        help="use no desktop: the owner's program alone, and this command's own output",
    )


def run(args: argparse.Namespace) -> int:
    """Tell until it is ended; 0, with --try 3 where there is nobody to tell and 4 where telling failed."""
    if args.trial:
        return _try(args, settings(args))
    own = places.user_state()
    with Waiting((*_ENDS, signal.SIGHUP)) as waiting, alone(own):
        desktop = None if args.no_desktop else Desktop()
        owner = settings(args)
        while True:
            agent = _agent(args, owner, own, desktop)
            ended = _tell(agent, waiting, desktop)
            if ended in _ENDS:
                if desktop is not None:
                    desktop.close()
                return 0
            owner = _read_again(args, owner)


def _tell(agent: Agent, waiting: Waiting, desktop: Desktop | None) -> signal.Signals:
    """Look, tell and listen until a signal comes."""
    due = time.monotonic()
    while True:
        if time.monotonic() >= due:
            agent.turn(now())
            due = time.monotonic() + EVERY
        heard = waiting.wait(
            max(0.0, due - time.monotonic()), (lambda: None) if desktop is None else desktop.fileno
        )
        if heard:
            return next((one for one in heard if one in _ENDS), heard[0])
        agent.listen(now())


def _agent(args: argparse.Namespace, owner: Settings, own: Path, desktop: Desktop | None) -> Agent:
    wanted = owner.notices
    return Agent(
        Ways(
            say=_say,
            screen=desktop,
            hook=_hook(args, owner),
            about=drive_answer,
            open=_opener(args, wanted.terminal),
        ),
        partial(look, lambda: state_folder(args)),
        own,
        Wishes(quiet=minutes_of(wanted.quiet), monthly=wanted.monthly),
        _minute,
    )


def _hook(args: argparse.Namespace, owner: Settings) -> Callable[[Mapping[str, object]], None] | None:
    """The owner's program; the system's is left to the system's own agent, or it would run twice."""
    command = owner.notices.command
    shared = places.settings_file(args.settings) == places.SYSTEM_SETTINGS
    if not command or (shared and not args.no_desktop):
        return None
    return partial(hook.run, command)


def _opener(args: argparse.Namespace, terminal: tuple[str, ...]) -> Callable[[], None] | None:
    """What opens the dashboard in a terminal; None where no terminal is known."""
    known = [one for one in _TERMINALS if shutil.which(one[0]) is not None]
    if not terminal and not known:
        return None
    found = terminal or known[0]
    words = [*found, sys.executable, "-m", "diskwatch"]
    for name in ("state", "settings"):
        if (value := getattr(args, name)) is not None:
            words += [f"--{name}", str(Path(value).absolute())]
    opened: list[subprocess.Popen[bytes]] = []

    def open_it() -> None:
        # Those that have been closed meanwhile are taken note of, or they would stay in the table of processes.
        opened[:] = [one for one in opened if one.poll() is None]
        quiet = subprocess.DEVNULL
        try:
            opened.append(
                subprocess.Popen(words, stdin=quiet, stdout=quiet, stderr=quiet, start_new_session=True)
            )
        except OSError as error:
            raise DiskwatchError(
                f"the terminal {found[0]} could not be started: {error.strerror}",
                hint="see [notices] terminal in the settings",
            ) from error

    return open_it


def _read_again(args: argparse.Namespace, before: Settings) -> Settings:
    try:
        found = settings(args)
    except SettingsError as error:
        _say(f"{error}; the settings that held before go on")
        return before
    _say("the settings were read again")
    return found


def _try(args: argparse.Namespace, owner: Settings) -> int:
    at = now()
    words = wording.of_trial(at)
    program = _hook(args, owner)
    if args.no_desktop and program is None:
        raise NothingToWorkOn(
            "there is neither a desktop nor a program to tell", hint="set [notices] command in the settings"
        )
    desktop = Desktop()
    sent, told = [], []
    for name, way in (
        ("the desktop", None if args.no_desktop else partial(desktop.show, words)),
        (
            "the owner's program",
            None if program is None else partial(program, notice(words, at, about="trial")),
        ),
    ):
        if way is None:
            continue
        try:
            way()
            sent.append(name)
        except DiskwatchError as error:
            told.append(str(error))
    desktop.close()
    for text in told:
        _say(text)
    if sent:
        print(f"A trial notice was handed to {' and to '.join(sent)}.")
    return DiskwatchError.exit_code if told else 0


def _say(text: str) -> None:
    talk(f"diskwatch: {text}")


def _minute(at: int) -> int:
    here = time.localtime(at)
    return here.tm_hour * 60 + here.tm_min
