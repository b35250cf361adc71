"""Whole screens as text, kept beside this file: what a change of layout does to them is to be looked at.

python -m tests.dashboard.snapshots      takes them anew
"""

import asyncio
import os
import time
from pathlib import Path

from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import ALL, bays
from tests.dashboard.screen import settled, text_of

FOLDER = Path(__file__).parent / "snapshots"
TAKEN = {
    "bays-80x24": ((80, 24), ()),
    "bays-200x60": ((200, 60), ()),
    "drive-80x24": ((80, 24), ("down", "enter")),
    "drive-120x40": ((120, 40), ("down", "enter")),
}


async def taken(name: str) -> str:
    """One screen as it is now."""
    size, keys = TAKEN[name]
    app = dashboard(Answers(), bays(*ALL))
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        await settled(pilot)
        for key in keys:
            await pilot.press(key)
            await settled(pilot)
        return text_of(app) + "\n"


def kept(name: str) -> Path:
    """Where it is kept."""
    return FOLDER / f"{name}.txt"


if __name__ == "__main__":
    os.environ["TZ"] = "UTC"
    time.tzset()
    FOLDER.mkdir(exist_ok=True)
    for one in TAKEN:
        kept(one).write_text(asyncio.run(taken(one)), encoding="utf-8")
