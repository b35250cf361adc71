"""Random walks through the dashboard: keys, clicks, changes of size; each must leave a whole screen."""

import random

from textual.pilot import Pilot

from diskwatch.dashboard.app import Dashboard
from tests.dashboard.screen import rows_of, settled

KEYS = (
    *("up", "down", "left", "right", "pageup", "pagedown", "home", "end", "enter", "space", "escape", "tab"),
    *("a", "b", "c", "d", "h", "k", "l", "m", "n", "o", "p", "r", "s", "t", "w", "y", "z"),
    *("question_mark", "colon", "slash", "comma", "full_stop", "backspace", "x", "1", "ctrl+p"),
)
"""Every key that does something on some page, and a few that do nothing; none that leaves."""


async def walk(pilot: Pilot[None], steps: int, seed: int) -> None:
    """Take so many steps; after each the screen has as many rows as it should, none of them too wide.

    Args:
        pilot: of a running dashboard.
        steps: keys, clicks and changes of size together.
        seed: of chance, so that a walk that fails can be walked again.
    """
    app, chance = pilot.app, random.Random(seed)  # noqa: S311 - a walk that can be walked again keeps no secret
    assert isinstance(app, Dashboard)
    for step in range(steps):
        what = chance.random()
        if what < 0.06:
            await pilot.resize_terminal(chance.randint(40, 250), chance.randint(10, 80))
        elif what < 0.16:
            await click(pilot, app, chance)
        else:
            key = chance.choice(KEYS)
            # Ends of pages are reached by chance alone; the way back is not.
            await pilot.press("escape" if len(app.screen_stack) > 4 else key)
        if step % 7 == 0:
            await settled(pilot)
        await pilot.pause()
        assert app.is_running, f"step {step} of walk {seed} ended the dashboard"
        rows, size = rows_of(app), app.size
        assert len(rows) == size.height, f"step {step} of walk {seed}"
        assert max(map(len, rows)) <= size.width, f"step {step} of walk {seed}"


async def click(pilot: Pilot[None], app: Dashboard, chance: random.Random) -> None:
    """A click anywhere but on the word that quits."""
    x, y = chance.randrange(app.size.width), chance.randrange(app.size.height)
    row = rows_of(app)[y]
    if "quit" not in row or x < row.index("quit") - 2:
        await pilot.click(offset=(x, y))
