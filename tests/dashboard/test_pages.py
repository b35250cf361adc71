import subprocess
import sys

import pytest

from diskwatch.dashboard import pages
from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.weight import Face
from tests.dashboard.drives import NOW


@pytest.fixture
def desk():
    made = Desk(lambda: NOW, questions=None, watching="", every=1_800, face=Face())
    yield made
    made.asker.shutdown()


@pytest.mark.parametrize(
    ("page", "sort"), [("why", "DriveScreen"), ("plan", "PlanScreen"), ("ticket", "TicketScreen")]
)
async def test_every_page_about_a_drive_is_about_that_drive(desk, page, sort):
    made = pages.of_a_drive(page, desk, 7)
    assert (type(made).__name__, vars(made)["number"]) == (sort, 7)


async def test_the_other_pages_are_what_they_are_called(desk):
    made = [pages.day_book(desk, None), pages.palette(desk), pages.help_page(desk, ())]
    assert [type(one).__name__ for one in made] == ["DayBookScreen", "Palette", "Help"]


def test_the_first_frame_loads_no_page():
    code = "import sys, diskwatch.dashboard.app; print(*sorted(sys.modules))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    loaded = set(done.stdout.split())
    assert "diskwatch.dashboard.bands" in loaded
    assert (
        not {f"diskwatch.dashboard.{name}" for name in ("drive_screen", "daybook_screen", "palette", "help")}
        & loaded
    )
    assert "diskwatch.analyser" not in loaded
