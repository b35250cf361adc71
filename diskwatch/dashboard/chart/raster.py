"""Dots finer than a letter: eight to a cell in Braille, two in half blocks, two in ASCII. Pure.

Braille patterns: The Unicode Standard, block U+2800; the bit of each dot is given there by its number.
"""

from enum import Enum

_BRAILLE = ((0x01, 0x08), (0x02, 0x10), (0x04, 0x20), (0x40, 0x80))
_HALVES = ("", "▀", "▄", "█")
_ASCII = ("", "'", ".", ":")


class Dots(Enum):
    """What dots are made of."""

    BRAILLE = "braille"
    BLOCKS = "blocks"
    ASCII = "ascii"

    @property
    def across(self) -> int:
        """Dots in the width of a letter."""
        return 2 if self is Dots.BRAILLE else 1

    @property
    def down(self) -> int:
        """Dots in the height of a letter."""
        return 4 if self is Dots.BRAILLE else 2


class Raster:
    """A plane of dots, the origin at the left end of the top row; what lies outside is left out."""

    def __init__(self, width: int, height: int, dots: Dots) -> None:
        """Make an empty plane.

        Args:
            width: columns of letters.
            height: rows of letters.
            dots: what they are made of.
        """
        self.wide, self.high = width * dots.across, height * dots.down
        self._dots = dots
        self._bits: dict[tuple[int, int], int] = {}

    def dot(self, x: int, y: int) -> None:
        """Set one dot."""
        if not (0 <= x < self.wide and 0 <= y < self.high):
            return
        (column, right), (row, below) = divmod(x, self._dots.across), divmod(y, self._dots.down)
        bit = _BRAILLE[below][right] if self._dots is Dots.BRAILLE else 1 << below
        self._bits[column, row] = self._bits.get((column, row), 0) | bit

    def upright(self, x: int, above: int, below: int) -> None:
        """Set all dots of a column between two rows, whichever is the higher."""
        for y in range(min(above, below), max(above, below) + 1):
            self.dot(x, y)

    def letter(self, column: int, row: int) -> str:
        """What stands in a cell; an empty text where no dot is set."""
        bits = self._bits.get((column, row), 0)
        if not bits:
            return ""
        if self._dots is Dots.BRAILLE:
            return chr(0x2800 + bits)
        return (_ASCII if self._dots is Dots.ASCII else _HALVES)[bits]
