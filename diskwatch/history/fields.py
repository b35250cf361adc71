"""Fields of a row that travelled: each is what it should be, or raises ValueError."""

from typing import Any

from diskwatch.history import rows


def words(thing: Any) -> str | None:
    """Text, or None where there is none."""
    return None if thing is None else text(thing)


def text(thing: Any) -> str:
    """Text, as the history can keep it."""
    if not isinstance(thing, str):
        raise ValueError(f"no text: {thing!r}")  # noqa: TRY004  # the file is wrong, not our caller
    return rows.text(thing)


def count(thing: Any) -> int | None:
    """A whole number, or None where it is not known."""
    if thing is not None and (isinstance(thing, bool) or not isinstance(thing, int)):
        raise ValueError(f"no whole number: {thing!r}")  # likewise
    return thing


def whole(thing: Any) -> int:
    """A whole number that must be there."""
    found = count(thing)
    if found is None:
        raise ValueError("a number is missing")
    return found


def data(thing: Any) -> dict[str, object]:
    """A JSON object."""
    if not isinstance(thing, dict):
        raise ValueError("its data are no object")  # noqa: TRY004  # likewise
    return thing


def measure(thing: Any) -> float | None:
    """A number, or None where there is none."""
    if thing is None or (isinstance(thing, int | float) and not isinstance(thing, bool)):
        return None if thing is None else float(thing)
    raise ValueError(f"no number: {thing!r}")
