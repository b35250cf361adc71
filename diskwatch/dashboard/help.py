"""The help page: what the four calls mean, what to mind when a drive fails, every key, every trouble."""

from dataclasses import replace
from typing import ClassVar

from rich.text import Text

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import BACK, DEEDS, MOVES, QUIT, SCROLLS, Key
from diskwatch.dashboard.paper import Paper, bound
from diskwatch.dashboard.weight import Face

_CALLS = (
    ("keep", "Go on using it. Keep a backup all the same."),
    ("look", "Something wants a hand: a cable, heat, load or a first defect. Watch it closer."),
    ("copy", "Copy the data off now, then replace the drive by the date given."),
    ("retire", "Stop relying on it. Take it out of service."),
    ("unread", "It has not been read, so nothing is known. Mind it like a look."),
    ("no SMART", "It cannot tell of itself. Only its traffic is watched."),
)
# Common practice, no source.
_CAUTIONS = (
    "Back up first, before any test, repair or update.",
    "Stop writing to a drive that fails, and copy what matters most first.",
    "Do not switch a failing drive off and on, and do not open it.",
    "Leave recovery to professionals where the data are worth much: every attempt of your own may cost some.",
    "The maker's warranty terms hold. Read them before you do anything to the drive.",
    "No tool can promise that a drive will not fail. Many drives fail without a sign in any counter.",
)
_FIGURES = (
    ("reads 12/s 1.4 MB/s 6 ms", "Requests a second, bytes a second, and how long one read took in the mean."),
    ("margin", "The time left until a limit is reached. Unknown where too little has been seen to say."),
    ("read 12 minutes ago", "When the last pass over the drive ended, and how."),
)
_STEPS_TOLD = (
    "The last twelve months: how long a drive within the norm would be watched until it shows the like. "
    "Less than a month, then from a month, a year, ten years, a hundred years on."
)
_CALLED = "Where its present call began: the call's first letter."
_MARGIN = "Right of now, two years: between when and when its first limit will be reached, as things go now."
_LINE = (
    ("─░▒▓█", _STEPS_TOLD),
    ("l c r", _CALLED),
    ("│", "Now."),
    ("[═══]", _MARGIN),
    ("····", "Too little is known to say."),
)
_ASCII_LINE = (
    ("-.:+#", _STEPS_TOLD),
    ("l c r", _CALLED),
    ("|", "Now."),
    ("[===]", _MARGIN),
    ("....", "Too little is known to say."),
)
_READ = "What was read, low to high. No dots, and the axis broken: nothing was read."
_FAINT = "The range that it usually keeps to, and the straight line through the last quarter."
_LIMIT = "A limit: the maker's, a standard's, or usual ones; 'why' says whose."
_FAN = "Where it may be, as things go now, until it reaches the limit."
_PICTURE = (("dots", _READ), ("· ·", _FAINT), ("───", _LIMIT), ("│", "Now."), ("░░░", _FAN))
_ASCII_PICTURE = (("' . :", _READ), (". .", _FAINT), ("---", _LIMIT), ("|", "Now."), ("///", _FAN))


def help_lines(
    watching: str,
    troubles: tuple[str, ...],
    width: int,
    face: Face,
    keys: tuple[Key, ...] = (),
) -> tuple[Text, ...]:
    """The page as lines.

    Args:
        watching: how the screen was opened, one harmless sentence.
        troubles: what is wrong with the watch now, harmless sentences.
        width: columns that every line must keep within.
        face: what the terminal can show.
        keys: those of the screen that the page was called from.
    """
    lines: list[Text] = []
    if troubles:
        lines += _part("What is wrong now", [("!", text) for text in troubles], width)
    lines += _part("What to do with a drive", _CALLS, width)
    lines += _part("When a drive fails", [("-", text) for text in _CAUTIONS], width)
    lines += _part("What stands in a band", _FIGURES, width)
    lines += _part("A drive's line through time", _ASCII_LINE if face.ascii_only else _LINE, width)
    lines += _part("A signal through time", _ASCII_PICTURE if face.ascii_only else _PICTURE, width)
    if keys:
        lines += _part(
            "Keys of the page that you come from", [(key.printed(face), key.help) for key in keys], width
        )
    lines += _part("Keys", [(key.printed(face), key.help) for key in (*MOVES, *DEEDS)], width)
    lines += _part(
        "This screen", [("-", f"It was opened like this: {watching}. It reads the history only.")], width
    )
    return tuple(lines[:-1])


def _part(title: str, rows: list[tuple[str, str]] | tuple[tuple[str, str], ...], width: int) -> list[Text]:
    widest = max(len(word) for word, _ in rows)
    # A word in the margin wider than a third of the screen would squeeze the text: it gets a line of its own.
    beside = widest <= max(width // 3, 1)
    indent = widest + 3 if beside else 3
    lines = [fit(Text(title, style="bold underline"), width)]
    for word, text in rows:
        if not beside:
            lines.append(fit(Text.assemble(" ", (word, "bold")), width))
        for number, part in enumerate(wrap(text, max(width - indent, 10))):
            lead = word if beside and number == 0 else ""
            lines.append(fit(Text.assemble(" ", (lead, "bold"), " " * (indent - 1 - len(lead)), part), width))
    return [*lines, Text()]


class Help(Paper):
    """The help page over any screen; the same key, or Escape, leads back."""

    BINDINGS: ClassVar = bound((replace(BACK, keys="question_mark"),))

    def __init__(self, desk: Desk, keys: tuple[Key, ...]) -> None:
        """Take the keys of the screen that it was called from."""
        super().__init__(desk)
        self._called_from = keys

    def page(self, width: int) -> tuple[Text, ...]:
        """The page."""
        desk = self.desk
        return help_lines(desk.watching, desk.troubles(), width, desk.face, keys=self._called_from)

    def told_keys(self) -> tuple[Key, ...]:
        """Only what leads through the page and back."""
        return (replace(BACK, face="? Esc"), *SCROLLS, QUIT)
