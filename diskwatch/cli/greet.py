"""One line for a login shell or the message of the day: what the drives ask for.

It is silent only when every drive is called keep and somebody is watching.
"""

import argparse

from diskwatch.cli.common import now, settings, state_folder
from diskwatch.errors import NothingToWorkOn
from diskwatch.history.reader import Past
from diskwatch.records import Bays, CallWord, DriveLine
from diskwatch.units import plain

_LONGEST = 160
"""Characters of the line, at most: two lines of a narrow terminal."""

_SEE = "See 'diskwatch bays'."


def options(parser: argparse.ArgumentParser) -> None:
    """No options of its own."""


def run(args: argparse.Namespace) -> int:
    """Greet; 0, 3 where no drive was read yet, 4 where the history cannot be read."""
    if args.settings is not None:
        settings(args)
    try:
        with Past.open(state_folder(args)) as past:
            bays = past.bays(now())
    except NothingToWorkOn as error:
        print("diskwatch: nobody is watching the drives of this machine. Start 'diskwatch watch'.")
        return error.exit_code
    line = greeting(bays)
    if line is not None:
        print(line)
    return 0


def greeting(bays: Bays) -> str | None:
    """What to say to somebody who logs in; None where nothing asks for a hand and somebody is watching.

    Args:
        bays: all drives at one moment.
    """
    asking = [line for line in bays.drives if line.call is None or line.call.word is not CallWord.KEEP]
    parts = [] if bays.watcher is not None else ["Nobody is watching the drives!"]
    parts += [f"The watch has trouble: {one}" for one in bays.trouble[:1]]
    if asking:
        parts.append(_asking(asking))
    if not parts:
        return None
    text = plain(f"diskwatch: {' '.join(parts)}")
    room = _LONGEST - len(_SEE) - 1
    return f"{text if len(text) <= room else text[: room - 1].rstrip() + '…'} {_SEE}"


def _asking(lines: list[DriveLine]) -> str:
    first, *rest = lines
    named = f"{_word(first)} {first.name} ({first.place.device})"
    reason = f": {first.call.reason}" if first.call is not None else "."
    more = f" {len(rest)} more {'asks' if len(rest) == 1 else 'ask'} for a hand." if rest else ""
    return f"{named}{'' if rest else reason}{'.' if rest else ''}{more}"


def _word(line: DriveLine) -> str:
    return "not read yet:" if line.call is None else line.call.word.value
