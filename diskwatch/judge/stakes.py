"""What is said of a drive beside its call, out of what the history holds: odds, margin, day of replacement."""

from collections.abc import Iterator

from diskwatch.judge import margin as margins
from diskwatch.judge.language import _
from diskwatch.judge.margin_told import margin_told, replace_by_told
from diskwatch.judge.odds_told import no_odds
from diskwatch.records import CallWord, DriveLine, Margin, Odds
from diskwatch.units import day_number


def odds_of(line: DriveLine, at: int) -> Odds | None:
    """The odds that the drive's findings carry, as long as the horizon of the figures reaches.

    Args:
        line: the drive.
        at: now, UTC seconds since 1970.
    """
    for one in line.findings:
        if one.name != "level:odds":
            continue
        data = one.data
        since, days, high = data.get("since_day"), data.get("days"), data.get("high")
        if not isinstance(since, int) or not isinstance(days, int) or not isinstance(high, float):
            continue
        if day_number(at) - since < days:
            return Odds(
                condition=str(data["condition"]),
                days=days,
                share=_share(data.get("share")),
                low=_share(data.get("low")),
                high=high,
                level=_share(data.get("level")) or 0.0,
                drives=int(str(data["drives"])),
                failed=int(str(data["failed"])),
                source=str(data["source"]),
                since_day=since,
            )
    return None


def _share(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) else None


def no_odds_of(line: DriveLine, at: int) -> str | None:
    """Why the drive has no odds; None where it has."""
    if odds_of(line, at) is not None:
        return None
    return no_odds(line.drive.kind)


def margin_of(line: DriveLine, at: int) -> Margin:
    """The earliest of the drive's forecasts, in days from now.

    Args:
        line: the drive.
        at: now, UTC seconds since 1970.
    """
    if line.call is None:
        return Margin(reason=_("it has not been read yet"))
    return margins.margin(line.forecasts, day=day_number(at))


def replace_by_of(line: DriveLine, at: int) -> int | None:
    """The UTC day number by which a drive called copy is to be replaced; None for every other call."""
    return margins.replace_by(line.call, margin_of(line, at), day=day_number(at))


def in_time(line: DriveLine, at: int) -> Iterator[str]:
    """By when a drive is to be replaced, and its margin where one is known and the call asks for a deed."""
    by, left = replace_by_of(line, at), margin_of(line, at)
    if by is not None:
        yield replace_by_told(by, day_number(at))
    if left.known and line.call is not None and line.call.word is not CallWord.KEEP:
        yield margin_told(left, at)
