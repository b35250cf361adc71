from textual.app import App, ComposeResult
from textual.containers import VerticalScroll
from textual.widgets import Static

from diskwatch.dashboard.scroll import with_plain_thumb
from tests.dashboard.screen import text_of

PART_BLOCKS = set("▁▂▃▄▅▆▇")


class Page(App[None]):
    def __init__(self, *, plain: bool) -> None:
        super().__init__()
        self.plain = plain

    def compose(self) -> ComposeResult:
        with VerticalScroll() as scrolls:
            if self.plain:
                with_plain_thumb(scrolls)
            yield Static("\n".join("row" for _ in range(23)))


async def test_the_thumb_has_no_part_blocks():
    seen = {}
    for plain in (False, True):
        app = Page(plain=plain)
        async with app.run_test(size=(20, 7)) as pilot:
            await pilot.pause()
            seen[plain] = PART_BLOCKS & set(text_of(app))
    assert seen[False]  # the library's own thumb has some at this size
    assert not seen[True]
