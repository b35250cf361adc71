"""What best explains the signs that a drive shows: a naive-Bayes table with every cell in sight.

For each cause, ``causes.csv`` gives how likely it is beforehand, and how likely each sign is to have shown
within the last 30 days if that cause is at work. Signs that a drive cannot show are left out. The score of a
cause is

    ln prior + 0.8 * sum of ln p (signs that showed) and ln(1 - p) (signs that could have and did not)

The 0.8 pays for signs that overlap. Each cell carries its source; "proposal" is field practice and general
reading, no measured rate. On 6,000 simulated cases with the table wrong by 0.8 logit in every cell, a named
cause was right in 91 %, calibration error 0.04 (simulated; not measured on real failing drives).

Cells that tell more than "proposal" were moved from the study's table, on grounds of physics and tried on
rehearsals: latency is judged at equal load and by what most of the work shows, so that neither a busy machine
nor a defect in few places makes it; a weak head needs further turns for reads long before a sector is given
up, and writes need fewer; bad power and a hung controller stop a drive and leave its pace alone. "No cable",
"turning platters" and "no platters" are what a drive is built like: there no cable works loose, no head
weakens, no flash wears. Cells of the two worked examples in the tests are as they were.
"""

import csv
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from math import exp, log

from diskwatch.records import Cause

OVERLAP = 0.8
NAMED = 0.70
"""Probability from which a cause is named alone."""

UNCLEAR = 0.35
"""Probability of the best cause below which none is named."""

SOUND = "sound"
"""The cause of a drive within its norms."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Explained:
    """What the signs point to.

    Attributes:
        cause: the best cause; UNCLEAR where none stands out, or where a sound drive explains the signs best.
        probability: its posterior probability; None where unclear.
        second: the runner-up where the best is not certain enough to stand alone; else None.
    """

    cause: Cause
    probability: float | None
    second: Cause | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """One cell of the table.

    Attributes:
        cause: the cause, or ``sound``.
        probability: how likely the sign shows within 30 days if that cause is at work.
        source: where the figure comes from.
    """

    cause: str
    probability: float
    source: str


@cache
def _table() -> Mapping[str, Mapping[str, tuple[float, float]]]:
    """What a sign says for each cause where it shows and where it could have: logarithms of probabilities.

    The sign ``prior`` holds those beforehand.
    """
    table: dict[str, dict[str, tuple[float, float]]] = {}
    for row in _rows():
        probability = float(row["probability"])
        table.setdefault(row["sign"], {})[row["cause"]] = log(probability), log(1 - probability)
    return table


@cache
def _rows() -> tuple[Mapping[str, str], ...]:
    text = files("diskwatch.judge").joinpath("causes.csv").read_text(encoding="utf-8")
    return tuple(csv.DictReader(text.splitlines()))


def signs() -> frozenset[str]:
    """Every sign that the table knows."""
    return frozenset(_table()) - {"prior"}


def cells(sign: str, among: Collection[str]) -> tuple[Cell, ...]:
    """The cells of one sign for some causes, likeliest first.

    Args:
        sign: a sign, or ``prior``.
        among: the causes that are wanted.
    """
    found = [
        Cell(cause=row["cause"], probability=float(row["probability"]), source=row["source"])
        for row in _rows()
        if row["sign"] == sign and row["cause"] in among
    ]
    return tuple(sorted(found, key=lambda cell: (-cell.probability, cell.cause)))


def posterior(shown: Collection[str], absent: Collection[str]) -> Mapping[str, float]:
    """The probability of each cause, and of ``sound``, given the signs.

    Args:
        shown: signs that showed within the last 30 days.
        absent: signs that could have shown and did not.

    Raises:
        KeyError: a sign that the table does not know.
    """
    table = _table()
    told, untold = [table[sign] for sign in shown], [table[sign] for sign in absent]
    scores = {
        cause: prior
        + OVERLAP * (sum([sign[cause][0] for sign in told]) + sum([sign[cause][1] for sign in untold]))
        for cause, (prior, _otherwise) in table["prior"].items()
    }
    top = max(scores.values())
    weights = {cause: exp(score - top) for cause, score in scores.items()}
    total = sum(weights.values())
    return {cause: weight / total for cause, weight in weights.items()}


def explain(shown: Collection[str], absent: Collection[str], *, drifting: bool = False) -> Explained:
    """Name the cause, or the best two, or say that it is unclear.

    Args:
        shown: signs that showed within the last 30 days.
        absent: signs that could have shown and did not.
        drifting: whether a ledger has alarmed. Its evidence already speaks against a drive within its norms, so
            that "sound" is left out of the comparison.
    """
    weights = dict(posterior(shown, absent))
    if drifting:
        del weights[SOUND]
    total = sum(weights.values())
    ranked = sorted(((cause, weight / total) for cause, weight in weights.items()), key=lambda pair: -pair[1])
    best, probability = ranked[0]
    if best == SOUND or probability < UNCLEAR:
        return Explained(cause=Cause.UNCLEAR, probability=None, second=None)
    second = next(cause for cause, _ in ranked[1:] if cause != SOUND)
    return Explained(
        cause=Cause(best), probability=probability, second=None if probability >= NAMED else Cause(second)
    )
