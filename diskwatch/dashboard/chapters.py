"""Chapters as lines: a title, then whole sentences, broken between words. Pure."""

from collections.abc import Iterable

from rich.text import Text

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.questions import Chapter
from diskwatch.units import plain

_LEAST = 10


def chapter_lines(chapters: Iterable[Chapter], width: int) -> tuple[Text, ...]:
    """The lines of some chapters, one blank line between two.

    Args:
        chapters: those without lines are left out.
        width: columns that every line must keep within.
    """
    lines: list[Text] = []
    for chapter in chapters:
        if not chapter.lines:
            continue
        if lines:
            lines.append(Text())
        lines.append(fit(Text(f" {plain(chapter.title)}", style="bold underline"), width))
        for number, sentence in enumerate(chapter.lines, 1):
            lead = f"{number}. " if chapter.numbered else ""
            room = max(width - 3 - len(lead), _LEAST)
            for row, part in enumerate(wrap(plain(sentence), room)):
                begin = lead if row == 0 else " " * len(lead)
                lines.append(fit(Text(f"   {begin}{part}"), width))
    return tuple(lines)
