"""The keys, once: the application binds them, the last line and the help tell them. Pure."""

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
        face_ascii: the same in ASCII.
        does: the deed, as short as it goes.
        action: the application's action.
        help: the deed in a sentence.
    """

    keys: str
    face: str
    face_ascii: str
    does: str
    action: str
    help: str


MOVES = (
    Key(keys="up", face="↑", face_ascii="Up", does="", action="move(-1)", help="Go to the drive above."),
    Key(keys="down", face="↓", face_ascii="Down", does="", action="move(1)", help="Go to the drive below."),
    Key(keys="pageup", face="PgUp", face_ascii="PgUp", does="", action="page(-1)", help="Go up by a screen."),
    Key(
        keys="pagedown", face="PgDn", face_ascii="PgDn", does="", action="page(1)", help="Go down by a screen."
    ),
    Key(keys="home", face="Home", face_ascii="Home", does="", action="first", help="Go to the first drive."),
    Key(keys="end", face="End", face_ascii="End", does="move", action="last", help="Go to the last drive."),
)
DEEDS = (
    Key(
        keys="space",
        face="Space",
        face_ascii="Space",
        does="unfold",
        action="unfold",
        help="Unfold the drive, or fold it again: all findings, exact times, serial.",
    ),
    Key(
        keys="r",
        face="r",
        face_ascii="r",
        does="look again",
        action="look",
        help="Read the history again at once; it is read every second anyway. No drive is asked.",
    ),
    Key(keys="l", face="l", face_ascii="l", does="light", action="light", help="Light or dark background."),
    Key(
        keys="question_mark",
        face="?",
        face_ascii="?",
        does="help",
        action="help",
        help="This page; again to leave.",
    ),
    Key(keys="q,ctrl+c", face="q", face_ascii="q", does="quit", action="quit", help="Quit."),
)


def keys_line(width: int, face: Face) -> Text:
    """The last line of the screen: every key where it fits, else those that lead to the others.

    A deed can be clicked as well.
    """
    moves = " ".join(key.face_ascii if face.ascii_only else key.face for key in MOVES)
    for told, deeds in (
        (f"{moves} {MOVES[-1].does}", DEEDS),
        (moves, DEEDS),
        ("", DEEDS),
        ("", tuple(key for key in DEEDS if key.action in {"unfold", "help", "quit"})),
    ):
        line = Text()
        if told:
            line.append(moves, style="bold")
            line.append(told.removeprefix(moves))
        for key in deeds:
            line.append("  " if line else "")
            click = Style(meta={"@click": f"app.{key.action}"})
            line.append_text(Text.assemble((key.face, "bold"), f" {key.does}", style=click))
        if line.cell_len <= width:
            return line
    return fit(line, width)
