"""Fitting text into columns of a terminal, where a letter may be two columns wide or none.

Widths are those of `rich.cells`. The width of two texts together is measured on the two together: letters may
join into one.
"""

from rich.cells import cell_len, set_cell_size
from rich.text import Text

_WORD_END_WITHIN = 12


def cut(text: str, width: int, mark: str) -> str:
    """Text no wider than ``width`` columns.

    Args:
        text: harmless text (`diskwatch.units.plain`).
        width: columns; less than one leaves nothing.
        mark: what stands where something was cut off.

    Returns:
        The text, or its beginning and the mark; between words where a word ends near the cut.
    """
    if cell_len(text) <= width:
        return text
    if width <= cell_len(mark):
        return set_cell_size(text, max(width, 0)).rstrip()
    head = set_cell_size(text, width - cell_len(mark)).rstrip()
    blank = head.rfind(" ")
    within_word = not text[len(head) :].startswith(" ")
    if within_word and blank > 0 and cell_len(head) - cell_len(head[:blank]) <= _WORD_END_WITHIN:
        head = head[:blank]
    return head.rstrip(" ,;") + mark


def column(text: str, width: int, mark: str) -> str:
    """Text cut or filled up with blanks to exactly ``width`` columns."""
    return set_cell_size(cut(text, width, mark), max(width, 0))


def ends(left: Text, right: Text, width: int) -> Text:
    """One line with a text at either end, no wider than ``width``; what is too much on the right is cut off."""
    gap = width - cell_len(left.plain + right.plain)
    return fit(Text.assemble(left, " " * max(gap, 1), right), width)


def fit(line: Text, width: int) -> Text:
    """The same line, no wider than ``width``, whatever its letters do to each other."""
    if cell_len(line.plain) > width:
        line = line[: len(set_cell_size(line.plain, width).rstrip())]
    return line


def wrap(text: str, width: int) -> list[str]:
    """Text in lines no wider than ``width``, broken between words, and within a word that is too long.

    Args:
        text: harmless text.
        width: columns, at least 2, so that a wide letter has room.
    """
    broken: list[str] = []
    line = ""
    for word in text.split():
        joined = f"{line} {word}" if line else word
        if cell_len(joined) <= width:
            line = joined
            continue
        if line:
            broken.append(line)
        rest = word
        while cell_len(rest) > width:
            head = _longest(rest, width)
            broken.append(head)
            rest = rest[len(head) :]
        line = rest
    if line:
        broken.append(line)
    return broken


def _longest(word: str, width: int) -> str:
    """The longest beginning that fits; at least one letter, so that every loop over it ends."""
    length = min(len(word), width)
    while length > 1 and cell_len(word[:length]) > width:
        length -= 1
    return word[:length]
