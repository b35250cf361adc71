"""The first line of a page about one drive: which page, which drive. Pure."""

from rich.text import Text

from diskwatch.dashboard.band import edge
from diskwatch.dashboard.cells import cut, fit
from diskwatch.dashboard.weight import Face, weight_of
from diskwatch.dashboard.words import device, name
from diskwatch.records import DriveLine
from diskwatch.units import plain


def title(page: str, line: DriveLine | None, width: int, face: Face) -> Text:
    """The line, no wider than ``width``: the bar and the word of the drive's call, the page, the drive.

    Args:
        page: what the page is, such as "Copy plan".
        line: the drive; None where the history does not know it any more.
        width: columns.
        face: what the terminal can show.
    """
    if line is None:
        return fit(Text(f" {page}: this drive is not among those that the history knows any more."), width)
    weight = weight_of(line)
    serial = line.drive.identity.serial
    told = ", ".join([name(line), *([f"serial {plain(serial)}"] if serial else []), device(line)])
    begin = Text.assemble(edge(line, face), "  ", (weight.word, weight.style), "  ", (f"{page}: ", "bold"))
    return fit(begin.append(cut(told, max(width - begin.cell_len, 0), face.mark), style="bold"), width)
