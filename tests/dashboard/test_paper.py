import pytest

from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import ALL, bays
from tests.dashboard.screen import rows_of, settled, text_of


@pytest.mark.parametrize("key", ["enter", "c", "t", "b", "question_mark", "colon"])
@pytest.mark.parametrize("size", [(40, 10), (80, 24), (250, 80)])
async def test_every_page_keeps_its_first_line_and_its_way_back_at_every_size(key, size):
    app = dashboard(Answers(), bays(*ALL))
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        await pilot.press(key)
        await settled(pilot)
        rows = rows_of(app)
        assert len(rows) == size[1]
        assert all(len(row) <= size[0] for row in rows)
        assert "last pass" in rows[0]
        assert "Esc back" in "\n".join(rows[-2:])


async def test_a_page_scrolls_to_its_end_and_back():
    app = dashboard(Answers(), bays(*ALL))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        top = rows_of(app)[1]
        await pilot.press("end")
        await pilot.pause()
        assert "Holds /srv/photos" in text_of(app)
        await pilot.press("home")
        await pilot.pause()
        assert rows_of(app)[1] == top
