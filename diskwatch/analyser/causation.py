"""Which rows of the table of causes a call rests on, and what they come to."""

from collections.abc import Mapping
from dataclasses import dataclass

from diskwatch.analyser import signs
from diskwatch.analyser.state import DriveState
from diskwatch.judge import causes, rules
from diskwatch.judge.causes import Cell

SHOWN = 3
"""Causes of which the rows are laid out: the likeliest ones."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SignRow:
    """One sign and what it says of the likeliest causes.

    Attributes:
        sign: the sign.
        showed: whether it showed within the last 30 days; False where it could have and did not.
        cells: the table's cells for the likeliest causes.
    """

    sign: str
    showed: bool
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Causation:
    """How the cause of a call was worked out.

    Attributes:
        posterior: the probability of each cause, likeliest first; ``sound`` is among them where no ledger has
            spoken against it.
        prior: the table's cells before any sign, for the likeliest causes.
        rows: one a sign that was put to the table, those that showed first.
    """

    posterior: Mapping[str, float]
    prior: tuple[Cell, ...]
    rows: tuple[SignRow, ...]


def causation(state: DriveState) -> Causation | None:
    """The rows behind the cause of the call that stands; None where the table was not asked."""
    lead = rules.leading(state.standing.values())
    if lead is None or not state.signs:
        return None
    weights = dict(
        causes.posterior(
            [sign for sign, showed in state.signs.items() if showed],
            [sign for sign, showed in state.signs.items() if not showed],
        )
    )
    if signs.beyond_norm(lead):
        del weights[causes.SOUND]
    total = sum(weights.values())
    ranked = sorted(weights.items(), key=lambda pair: -pair[1])
    likeliest = [cause for cause, _ in ranked[:SHOWN]]
    rows = [
        SignRow(sign=sign, showed=showed, cells=causes.cells(sign, likeliest))
        for sign, showed in state.signs.items()
    ]
    return Causation(
        posterior={cause: weight / total for cause, weight in ranked},
        prior=causes.cells("prior", likeliest),
        rows=tuple(sorted(rows, key=lambda row: (not row.showed, row.sign))),
    )
