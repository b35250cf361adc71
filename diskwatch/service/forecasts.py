"""When a drive's forecasts are worked out anew: every week, and when what they speak of has moved."""

from contextlib import suppress

from diskwatch import analyser
from diskwatch.errors import DiskwatchError
from diskwatch.records import Forecast, LimitSource
from diskwatch.service.keeper import Keeper
from diskwatch.units import day_number

EVERY_DAYS = 7
"""Days after which a forecast is made anew: each takes milliseconds, and each is kept for ever."""

_Moved = tuple[object, ...]


class Forecasts:
    """Remembers when each drive's were made, and of what."""

    def __init__(self, keeper: Keeper) -> None:
        """Begin.

        Args:
            keeper: whose history holds those made before.
        """
        self._keeper = keeper
        self._made: dict[int, tuple[int, _Moved]] | None = None
        self._kept_days: dict[int, int] = {}
        self._after_alarm: dict[int, frozenset[str]] = {}

    def forget(self) -> None:
        """Look again: the history has become another."""
        self._made = None

    def due(self, number: int, state: analyser.DriveState, at: int) -> tuple[Forecast, ...]:
        """Forecasts to keep with this pass; none where those that stand will do.

        Args:
            number: the drive's number.
            state: its state after the pass.
            at: now, UTC seconds since 1970.
        """
        if self._made is None:
            self._made = {}
            self._learn()
        today, moved = day_number(at), _moved(state)
        alarmed = frozenset(analyser.alarmed(state))
        ended = self._after_alarm.get(number, frozenset()) - alarmed
        if not any(moved) and not ended:
            return ()
        day, of = self._made.get(number, (self._kept_days.get(number), moved))
        if day is not None and 0 <= today - day < EVERY_DAYS and of == moved and not ended:
            self._made[number] = (day, moved)
            return ()
        self._made[number] = (today, moved)
        self._after_alarm[number] = alarmed
        return analyser.forecasts(state, at, sorted(ended))

    def _learn(self) -> None:
        """What the history holds: when each drive's were made, and which of them speak of a standing alarm."""
        kept = None
        with suppress(DiskwatchError):  # what is wrong with the history is told when the round is kept
            kept = self._keeper.ask(lambda history: history.forecasts())
        every = (kept or {}).items()
        self._kept_days = {number: max(one.made_on_day for one in made) for number, made in every}
        self._after_alarm = {
            number: frozenset(
                one.signal for one in made if one.limit_from is LimitSource.OWN and one.reason is None
            )
            for number, made in every
        }


def _moved(state: analyser.DriveState) -> _Moved:
    """What forecasts speak of, as far as it moves in steps; all empty where there is nothing to forecast."""
    wearing = state.wearing
    return (
        None if wearing.endurance is None else ("endurance", wearing.endurance.percent),
        None if wearing.spare is None else ("spare", wearing.spare.percent),
        analyser.alarmed(state),
        tuple(
            state.streams[stream].episodes for stream in analyser.COUNTED if f"drift:{stream}" in state.standing
        ),
    )
