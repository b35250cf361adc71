"""The pages, each loaded when it is first opened: the first frame of the bays waits for none of them."""

from collections.abc import Callable

from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.keys import Key
from diskwatch.dashboard.paper import Paper

# ruff: noqa: PLC0415 - loading late is what this file is for


def of_a_drive(page: str, desk: Desk, number: int) -> Paper:
    """A page about one drive.

    Args:
        page: ``why``, ``plan`` or ``ticket``.
        desk: what all screens share.
        number: the drive's number in the history.

    Raises:
        KeyError: there is no such page.
    """
    return _OF_A_DRIVE[page](desk, number)


def day_book(desk: Desk, number: int | None) -> Paper:
    """The day book of one drive; None for all."""
    from diskwatch.dashboard.daybook_screen import DayBookScreen

    return DayBookScreen(desk, number)


def palette(desk: Desk) -> Paper:
    """The list of deeds."""
    from diskwatch.dashboard.palette import Palette

    return Palette(desk)


def help_page(desk: Desk, keys: tuple[Key, ...]) -> Paper:
    """The help, with the keys of the page that it was called from."""
    from diskwatch.dashboard.help import Help

    return Help(desk, keys)


def _why(desk: Desk, number: int) -> Paper:
    from diskwatch.dashboard.drive_screen import DriveScreen

    return DriveScreen(desk, number)


def _plan(desk: Desk, number: int) -> Paper:
    from diskwatch.dashboard.plan_screen import PlanScreen

    return PlanScreen(desk, number)


def _ticket(desk: Desk, number: int) -> Paper:
    from diskwatch.dashboard.ticket_screen import TicketScreen

    return TicketScreen(desk, number)


_OF_A_DRIVE: dict[str, Callable[[Desk, int], Paper]] = {"why": _why, "plan": _plan, "ticket": _ticket}
