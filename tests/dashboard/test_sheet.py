from rich.text import Text
from textual.app import App, ComposeResult

from diskwatch.dashboard.sheet import Sheet
from tests.dashboard.screen import rows_of


class Page(App[None]):
    """A sheet of numbered lines, one of which the test changes."""

    def __init__(self, count: int) -> None:
        super().__init__()
        self.lines = [f"line {number}" for number in range(count)]

    def compose(self) -> ComposeResult:
        yield Sheet(lambda width: tuple(Text(line[:width]) for line in self.lines))


async def test_lines_in_sight_are_drawn_and_the_others_come_by_scrolling():
    app = Page(100)
    async with app.run_test(size=(30, 10)) as pilot:
        await pilot.pause()
        assert rows_of(app)[0].startswith("line 0")
        app.query_one(Sheet).reveal(50)
        await pilot.pause()
        assert rows_of(app)[-1].startswith("line 50")
        app.query_one(Sheet).reveal(20)
        await pilot.pause()
        assert rows_of(app)[0].startswith("line 20")


async def test_only_the_line_that_became_another_is_drawn_again(monkeypatch):
    app = Page(8)
    async with app.run_test(size=(30, 10)) as pilot:
        await pilot.pause()
        sheet = app.query_one(Sheet)
        drawn: list[int] = []
        monkeypatch.setattr(sheet, "refresh_line", drawn.append)
        app.lines[3] = "another"
        sheet.show()
        sheet.show()
        assert drawn == [3]


async def test_a_page_that_grows_and_shrinks_keeps_what_it_has():
    app = Page(2)
    async with app.run_test(size=(30, 6)) as pilot:
        await pilot.pause()
        for count in (50, 1, 0):
            app.lines = [f"line {number}" for number in range(count)]
            app.query_one(Sheet).show()
            await pilot.pause()
            assert len(app.query_one(Sheet).drawn) == count
        assert rows_of(app)[0] == ""
