from typing import Self

from rich.text import Text
from textual.app import App, ComposeResult
from textual.geometry import Region

from diskwatch.dashboard.lines import Build, Lines
from tests.dashboard.screen import rows_of


class Watched(Lines):
    """Lines that remember which rows they asked to be drawn again."""

    def __init__(self, build: Build) -> None:
        self.asked: list[str | list[int]] = []
        super().__init__(build)

    def refresh(
        self, *regions: Region, repaint: bool = True, layout: bool = False, recompose: bool = False
    ) -> Self:
        self.asked.append("layout" if layout else [region.y for region in regions])
        return super().refresh(*regions, repaint=repaint, layout=layout, recompose=recompose)


class Page(App[None]):
    def __init__(self, rows: list[str]) -> None:
        super().__init__()
        self.rows = rows
        self.lines = Watched(lambda width: tuple(Text(row[:width]) for row in self.rows))

    def compose(self) -> ComposeResult:
        yield self.lines


async def test_lines_stand_one_under_the_other():
    app = Page(["one", "two"])
    async with app.run_test(size=(20, 5)):
        assert rows_of(app)[:3] == ["one", "two", ""]


async def test_only_the_row_that_became_another_is_drawn_again():
    app = Page(["one", "two", "three"])
    async with app.run_test(size=(20, 5)) as pilot:
        app.lines.asked.clear()
        app.rows = ["one", "TWO", "three"]
        app.lines.show()
        await pilot.pause()
        assert app.lines.asked == [[1]]
        assert rows_of(app)[:3] == ["one", "TWO", "three"]


async def test_nothing_is_drawn_again_where_nothing_changed():
    app = Page(["one", "two"])
    async with app.run_test(size=(20, 5)) as pilot:
        app.lines.asked.clear()
        app.lines.show()
        await pilot.pause()
        assert app.lines.asked == []


async def test_more_lines_make_room_for_themselves():
    app = Page(["one"])
    async with app.run_test(size=(20, 5)) as pilot:
        app.rows = ["one", "two"]
        app.lines.show()
        await pilot.pause()
        assert rows_of(app)[:2] == ["one", "two"]
        assert app.lines.size.height == 2


async def test_without_lines_no_room_is_taken_and_later_lines_appear():
    app = Page([])
    async with app.run_test(size=(20, 5)) as pilot:
        assert app.lines.size.height == 0
        app.rows = ["late"]
        app.lines.show()
        await pilot.pause()
        assert rows_of(app)[0] == "late"


async def test_a_narrower_screen_makes_the_lines_anew():
    app = Page(["a long line of text"])
    async with app.run_test(size=(30, 5)) as pilot:
        await pilot.resize_terminal(6, 5)
        await pilot.pause()
        assert rows_of(app)[0] == "a long"
