"""The owner's own program: each notice goes to it as JSON on standard input, never through a shell."""

import json
import os
import signal
import subprocess
import tempfile
from collections.abc import Mapping, Sequence
from contextlib import suppress

from diskwatch.errors import DiskwatchError
from diskwatch.units import plain

PATIENCE = 30.0
"""Seconds that the program gets; mail over a slow line takes a few."""

_WORDS_KEPT = 200


class HookFailed(DiskwatchError):
    """The owner's program could not be run, failed, or did not end in time."""


def run(command: Sequence[str], notice: Mapping[str, object], patience: float = PATIENCE) -> None:
    """Hand a notice to the owner's program and wait for its end.

    The program and all that it started are killed when their time is over.

    Args:
        command: the program and its arguments.
        notice: plain JSON values.
        patience: seconds that it gets.

    Raises:
        HookFailed: what went wrong, with the first words that the program said of it.
    """
    name = plain(command[0])
    # A file and no pipe: what the program leaves running behind it may hold its error output open.
    with tempfile.TemporaryFile() as words:
        try:
            child = subprocess.Popen(
                command,
                stdin=subprocess.PIPE,
                stdout=subprocess.DEVNULL,
                stderr=words,
                cwd="/",
                start_new_session=True,
            )
        except (OSError, ValueError) as error:
            why = error.strerror if isinstance(error, OSError) else str(error)
            raise HookFailed(f"the command {name} could not be started: {why}", hint=_HINT) from error
        with child:
            try:
                child.communicate(json.dumps(notice).encode("ascii") + b"\n", patience)
            except subprocess.TimeoutExpired as error:
                _kill(child)
                raise HookFailed(
                    f"the command {name} was ended, since it took more than {patience:g} seconds", hint=_HINT
                ) from error
        if child.returncode:
            words.seek(0)
            told = plain(words.read(_WORDS_KEPT).decode("utf-8", "replace").strip())
            said = f" and said: {told}" if told else ""
            raise HookFailed(f"the command {name} ended with {child.returncode}{said}", hint=_HINT)


_HINT = "see [notices] command in the settings"


def _kill(child: subprocess.Popen[bytes]) -> None:
    """End the program with all of its group that it has started."""
    with suppress(OSError):
        os.killpg(child.pid, signal.SIGKILL)
