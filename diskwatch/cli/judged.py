"""The part of ``why`` that leads from findings to the deed: causes, odds, margin, rule."""

from collections.abc import Iterator

from diskwatch import analyser
from diskwatch.analyser.causation import Causation
from diskwatch.judge.causes import Cell
from diskwatch.judge.margin_told import margin_told, replace_by_told
from diskwatch.judge.odds_told import odds_told, what_failed_means
from diskwatch.judge.stakes import margin_of, no_odds_of, odds_of, replace_by_of
from diskwatch.records import DriveLine
from diskwatch.units import day_number

_NAMED = 4
"""Causes that are listed; the rest share what is left."""


def causes(why: analyser.Explanation) -> Iterator[str]:
    """How the cause was weighed, row by row."""
    found = why.causation
    if found is None:
        return
    ranked = list(found.posterior.items())
    told = ", ".join(f"{cause} {share:.0%}" for cause, share in ranked[:_NAMED])
    rest = 1 - sum(share for _, share in ranked[:_NAMED])
    yield f"{told}; all others together {rest:.0%}"
    yield f"before any sign: {_cells(found.prior)}"
    yield from _rows(found)


def _rows(found: Causation) -> Iterator[str]:
    for row in found.rows:
        yield f"{'showed' if row.showed else 'did not show'}: {row.sign} ({_cells(row.cells)})"


def _cells(cells: tuple[Cell, ...]) -> str:
    sources = sorted({cell.source for cell in cells})
    told = ", ".join(f"{cell.cause} {cell.probability:.0%}" for cell in cells)
    return f"{told}; {', '.join(sources)}"


def odds(line: DriveLine, at: int) -> Iterator[str]:
    """What became of other drives that showed the same, or why that is not said."""
    found = odds_of(line, at)
    if found is None:
        yield no_odds_of(line, at) or ""
        return
    yield odds_told(found)
    yield f"Source: {found.source}."
    yield what_failed_means()


def margin(line: DriveLine, at: int) -> Iterator[str]:
    """The time that is left, and the day of replacement."""
    yield margin_told(margin_of(line, at), at)
    by = replace_by_of(line, at)
    if by is not None:
        yield replace_by_told(by, day_number(at))
