from diskwatch.errors import HistoryError
from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import COPY, bays
from tests.dashboard.screen import settled, text_of


async def test_the_copy_plan_is_told_in_its_order():
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("c")
        await settled(pilot)
        text = text_of(app)
        assert "Copy plan: INVENTED RX-4000" in text
        assert "1. First the photos." in text
        assert "2. Then the rest." in text


async def test_where_there_is_no_plan_the_page_says_why():
    app = dashboard(Answers(HistoryError("history.db: gone")), bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("c")
        await settled(pilot)
        assert "There is no plan: history.db: gone" in text_of(app)
