"""The keys, once: the application binds them, the last lines and the help tell them. Pure."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from rich.style import Style
from rich.text import Text

from diskwatch.dashboard.cells import fit
from diskwatch.dashboard.weight import Face


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """One thing that a key does.

    Attributes:
        keys: names of the keys, as the terminal library knows them.
        face: what is printed on them.
        face_ascii: the same in ASCII; empty where it is the same.
        does: the deed, as short as it goes; empty where the next key tells it.
        action: the action, with the screen's or the application's name before it.
        help: the deed in a sentence.
        first: whether it stays where there is little room.
        spare: whether it goes first where there is not enough.
    """

    keys: str
    face: str
    does: str
    action: str
    help: str
    face_ascii: str = ""
    first: bool = False
    spare: bool = False

    def printed(self, face: Face) -> str:
        """What is printed on it, as far as the terminal can show it."""
        return self.face_ascii if face.ascii_only and self.face_ascii else self.face


BACK = Key(
    keys="escape", face="Esc", does="back", action="app.back", help="Back to where you came from.", first=True
)
MOVES = (
    Key(keys="up", face="↑", face_ascii="Up", does="", action="app.move(-1)", help="Go to the drive above."),
    Key(
        keys="down", face="↓", face_ascii="Dn", does="move", action="app.move(1)", help="Go to the drive below."
    ),
    Key(keys="pageup", face="PgUp", does="", spare=True, action="app.page(-1)", help="Go up by a screen."),
    Key(keys="pagedown", face="PgDn", does="", spare=True, action="app.page(1)", help="Go down by a screen."),
    Key(keys="home", face="Home", does="", spare=True, action="app.first", help="Go to the first drive."),
    Key(keys="end", face="End", does="jump", spare=True, action="app.last", help="Go to the last drive."),
)
SCROLLS = (
    Key(keys="up", face="↑", face_ascii="Up", does="", action="screen.scroll('up')", help="Read up."),
    Key(keys="down", face="↓", face_ascii="Dn", does="read", action="screen.scroll('down')", help="Read down."),
    Key(
        keys="pageup",
        face="PgUp",
        does="",
        spare=True,
        action="screen.scroll('page_up')",
        help="Up by a screen.",
    ),
    Key(
        keys="pagedown,space",
        face="PgDn",
        does="",
        spare=True,
        action="screen.scroll('page_down')",
        help="Down by a screen.",
    ),
    Key(
        keys="home", face="Home", does="", spare=True, action="screen.scroll('home')", help="To the beginning."
    ),
    Key(keys="end", face="End", does="jump", spare=True, action="screen.scroll('end')", help="To the end."),
)
WHY = Key(
    keys="enter",
    face="Enter",
    does="why",
    action="app.why",
    help="One drive: its signals through time, why it is called so, what would change that.",
    first=True,
)
UNFOLD = Key(
    keys="space",
    face="Space",
    does="unfold",
    action="app.unfold",
    help="Unfold the drive, or fold it again: all findings, exact times, serial.",
)
PLAN = Key(
    keys="c",
    face="c",
    does="plan",
    action="app.plan",
    help="What is at stake on the drive, and how to get it off.",
)
TICKET = Key(
    keys="t",
    face="t",
    does="ticket",
    action="app.ticket",
    help="What a help desk or a warranty desk would be sent about the drive.",
)
LATER = Key(
    keys="p",
    face="p",
    does="put off",
    action="app.put_off",
    help="Put the notices about the drive off for a week, for you alone. Asks for the key once more.",
)
DAY_BOOK = Key(keys="b", face="b", does="day book", action="app.day_book", help="What happened, newest first.")
LOOK = Key(
    keys="r",
    face="r",
    does="look again",
    action="app.look",
    help="Read the history again at once; it is read every second anyway. No drive is asked.",
)
LIGHT = Key(keys="l", face="l", does="light", action="app.light", help="Light or dark background.")
GO = Key(
    keys="colon,ctrl+p",
    face=":",
    does="go or do",
    action="app.palette",
    help="Every deed and every drive by its name: type a part of it.",
)
HELP = Key(
    keys="question_mark",
    face="?",
    does="help",
    action="app.help",
    help="This page; again to leave.",
    first=True,
)
QUIT = Key(keys="q,ctrl+c", face="q", does="quit", action="app.quit", help="Quit.", first=True)
DEEDS = (WHY, UNFOLD, PLAN, TICKET, LATER, DAY_BOOK, LOOK, LIGHT, GO, HELP, QUIT)

SPANS = (
    Key(keys="d", face="d", does="", action="screen.span('day')", help="The last day."),
    Key(keys="w", face="w", does="", action="screen.span('week')", help="The last week."),
    Key(keys="m", face="m", does="", action="screen.span('month')", help="The last month."),
    Key(keys="y", face="y", does="", action="screen.span('year')", help="The last year."),
    Key(keys="a", face="a", does="span", action="screen.span('all')", help="All that is known."),
)
SIGNALS = (
    Key(keys="left", face="←", face_ascii="Lt", does="", action="screen.signal(-1)", help="The signal before."),
    Key(
        keys="right",
        face="→",
        face_ascii="Rt",
        does="signal",
        action="screen.signal(1)",
        help="The next signal.",
    ),
)
SIEVE = (
    Key(
        keys="d",
        face="d",
        does="drive",
        action="screen.next_drive",
        help="Only the next drive; then all again.",
    ),
    Key(keys="k", face="k", does="kind", action="screen.next_kind", help="Only the next kind; then all again."),
    Key(keys="slash", face="/", does="search", action="screen.search", help="Only what holds these words."),
)
HIDES = (
    Key(
        keys="s", face="s", does="serial", action="screen.hide('serial')", help="Hide serials and WWNs, or not."
    ),
    Key(
        keys="h",
        face="h",
        does="host",
        action="screen.hide('host')",
        help="Hide names of host and users, or not.",
    ),
    Key(
        keys="o",
        face="o",
        does="paths",
        action="screen.hide('paths')",
        help="Hide where it is mounted, or not.",
    ),
    Key(
        keys="w",
        face="w",
        does="write file",
        action="screen.save",
        help="Write the ticket to a file.",
        first=True,
    ),
)
PACE = (
    Key(keys="comma", face=",", does="", action="app.slower", help="Let time pass half as fast."),
    Key(keys="full_stop", face=".", does="pace", action="app.faster", help="Let time pass twice as fast."),
    Key(keys="z", face="z", does="halt", action="app.halt", help="Let time stand still, or go on."),
    Key(keys="n", face="n", does="next day", action="app.step", help="Let one day pass, then stand still."),
)


def keys_rows(keys: Sequence[Key], width: int, face: Face, *, rows: int) -> tuple[Text, ...]:
    """The last lines of a screen: every key where they fit, else those that lead to the others.

    Args:
        keys: in the order in which they are told; each can be clicked as well.
        width: columns that every line must keep within.
        face: what the terminal can show.
        rows: the most lines that there is room for, at least 1.
    """
    told = _laid(keys, width, face)
    left = list(keys)
    while len(told) > rows and (loose := [key for key in left if not key.first]):
        spare = [key for key in loose if key.spare]
        gone = spare or _last_group(loose)
        left = [key for key in left if key not in gone]
        told = _laid(left, width, face)
    return tuple(fit(line, width) for line in told[:rows])


def _last_group(keys: list[Key]) -> list[Key]:
    """The last key, with those before it that share its deed."""
    begin = len(keys) - 1
    while begin > 0 and not keys[begin - 1].does:
        begin -= 1
    return keys[begin:]


def _laid(keys: Iterable[Key], width: int, face: Face) -> list[Text]:
    lines = [Text()]
    for part in _parts(keys, face):
        if lines[-1].cell_len + 2 + part.cell_len > width and lines[-1]:
            lines.append(Text())
        lines[-1].append("  " if lines[-1] else "")
        lines[-1].append_text(part)
    return lines


def _parts(keys: Iterable[Key], face: Face) -> Iterable[Text]:
    """Keys that share a deed stand together: those without a word of their own wait for the one that has it."""
    part = Text()
    for key in keys:
        style = Style(bold=True, meta={"@click": key.action})
        part.append(" " if part else "")
        part.append(key.printed(face), style=style)
        if key.does:
            part.append(f" {key.does}", style=Style(meta={"@click": key.action}))
            yield part
            part = Text()
    if part:
        yield part
