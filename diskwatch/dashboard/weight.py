"""How grave a call looks: its word, the density of the bar before it, its weight, and colour on top of those.

Nothing is told by colour alone. Colours are of the palette that people with any colour vision can tell apart:
Okabe and Ito (2008), "Color Universal Design"; their values are given here from memory.
"""

from dataclasses import dataclass

from diskwatch.dashboard.chart.raster import Dots
from diskwatch.records import CallWord, DriveLine, Outcome

WORD_WIDTH = 10
"""Columns of the call's word: the longest with a blank on either side, so that reverse has edges."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Face:
    """What the terminal can show.

    Attributes:
        ascii_only: whether its letters end at ASCII.
        braille: whether its font has Braille patterns; console fonts have not.
        light: whether the background is light.
        colours: whether colours are wanted. Without them a colour would come out as some grey, and the grey of
            a grave call may be fainter than that of a mild one.
    """

    ascii_only: bool = False
    braille: bool = True
    light: bool = False
    colours: bool = True

    @property
    def dots(self) -> Dots:
        """What pictures are made of."""
        if self.ascii_only:
            return Dots.ASCII
        return Dots.BRAILLE if self.braille else Dots.BLOCKS

    def paint(self, ink: "Ink") -> str:
        """The colour of an ink on this background; an empty text where no colours are wanted."""
        if not self.colours:
            return ""
        return ink.on_light if self.light else ink.on_dark

    @property
    def mark(self) -> str:
        """What stands where something was cut off."""
        return "..." if self.ascii_only else "…"


@dataclass(frozen=True, slots=True, kw_only=True)
class Ink:
    """A colour that stands out from either background; an empty text for the terminal's own.

    Attributes:
        on_dark: on the dark one.
        on_light: on the light one.
    """

    on_dark: str = ""
    on_light: str = ""


BLUE = Ink(on_dark="#56b4e9", on_light="#0072b2")
"""What is drawn of a signal, and the mild calls: sky blue, or blue where it would be too faint."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Weight:
    """How one call looks.

    Attributes:
        word: what stands where the call stands.
        bar: one block character; denser means graver.
        bar_ascii: its stand-in where blocks cannot be shown.
        ink: colour of the bar.
        style: weight of the word.
    """

    word: str
    bar: str
    bar_ascii: str
    ink: Ink
    style: str


_CALLS = {
    CallWord.KEEP: Weight(word="keep", bar="░", bar_ascii=":", ink=Ink(), style=""),
    CallWord.LOOK: Weight(word="look", bar="▒", bar_ascii="+", ink=BLUE, style="bold"),
    CallWord.COPY: Weight(
        word="copy",
        bar="▓",
        bar_ascii="%",
        ink=Ink(on_dark="#e69f00", on_light="#d55e00"),
        style="bold underline",
    ),
    CallWord.RETIRE: Weight(
        word="retire",
        bar="█",
        bar_ascii="#",
        ink=Ink(on_dark="#d55e00", on_light="#000000"),
        style="bold reverse",
    ),
}
_UNREAD = Weight(word="unread", bar="▒", bar_ascii="+", ink=BLUE, style="bold")
_NO_SMART = Weight(word="no SMART", bar="░", bar_ascii=":", ink=Ink(), style="")


def weight_of(line: DriveLine) -> Weight:
    """How a drive weighs.

    A drive that was not read yet weighs as much as a look, because nothing is known of it. One that has no
    SMART has no call and never will: it weighs as little as a keep.
    """
    if line.call is not None:
        return _CALLS[line.call.word]
    if line.last_pass is not None and line.last_pass.outcome is Outcome.NO_SMART:
        return _NO_SMART
    return _UNREAD
