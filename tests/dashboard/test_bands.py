from dataclasses import replace

import pytest
from textual.app import App, ComposeResult
from textual.pilot import Pilot

from diskwatch.dashboard.bands import Band, Bands
from diskwatch.dashboard.weight import Face
from diskwatch.records import DriveLine
from tests.dashboard.drives import ALL, COPY, KEEP, LOOK, NOW, RETIRE
from tests.dashboard.screen import rows_of, text_of

MANY = tuple(replace(COPY, number=number, label=f"Drive {number:02}") for number in range(1, 21))


class Page(App[None]):
    def __init__(self) -> None:
        super().__init__()
        self.bands = Bands(Face())

    def compose(self) -> ComposeResult:
        yield self.bands


def marked(app: Page) -> str:
    """The one row that carries the mark of choice."""
    (row,) = [row for row in rows_of(app) if row[1:2] == ">"]
    return row


async def shown(pilot: Pilot[None], drives: tuple[DriveLine, ...], now: int = NOW) -> None:
    pilot.app.query_one(Bands).show(drives, now)
    await pilot.pause()


async def test_every_drive_has_a_band_in_the_order_given():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, ALL)
        words = [
            row[3:].split("  ")[0] for row in rows_of(app) if row[3:].startswith(("retire", "copy", "look"))
        ]
        assert words == ["retire", "copy", "look"]
        assert len(app.bands.query(Band)) == len(ALL)


async def test_the_first_drive_is_chosen_at_first():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, ALL)
        assert "Photos" in marked(app)
        assert app.bands.chosen == RETIRE


async def test_without_drives_none_is_chosen_and_no_move_fails():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, ())
        app.bands.move(1)
        app.bands.page(1)
        app.bands.last()
        app.bands.unfold()
        await pilot.pause()
        assert app.bands.chosen is None


async def test_moving_stops_at_either_end():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (RETIRE, COPY))
        app.bands.move(-1)
        assert app.bands.chosen == RETIRE
        app.bands.move(5)
        assert app.bands.chosen == COPY


async def test_the_choice_stays_with_the_drive_when_the_order_changes():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (RETIRE, COPY, LOOK))
        app.bands.last()
        await shown(pilot, (LOOK, RETIRE, COPY))
        assert app.bands.chosen == LOOK
        assert "INVENTED Slim" in marked(app)


async def test_where_the_chosen_drive_goes_the_place_stays():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (RETIRE, COPY, LOOK))
        app.bands.last()
        await shown(pilot, (RETIRE, COPY))
        assert app.bands.chosen == COPY
        assert len(app.bands.query(Band)) == 2


async def test_a_drive_that_comes_gets_a_band():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (RETIRE,))
        await shown(pilot, (RETIRE, KEEP))
        assert "INVENTED NV-2000" in text_of(app)


async def test_the_list_scrolls_to_the_chosen_drive():
    app = Page()
    async with app.run_test(size=(80, 12)) as pilot:
        await shown(pilot, MANY)
        app.bands.last()
        await pilot.pause()
        assert "Drive 20" in marked(app)
        app.bands.first()
        await pilot.pause()
        assert "Drive 01" in marked(app)


async def test_a_page_is_as_many_drives_as_are_seen_whole():
    app = Page()
    async with app.run_test(size=(80, 12)) as pilot:
        await shown(pilot, MANY)
        app.bands.page(1)
        await pilot.pause()
        assert app.bands.chosen == MANY[4]  # twelve rows hold four bands of three
        app.bands.page(-1)
        assert app.bands.chosen == MANY[0]


async def test_unfolding_shows_more_and_folding_takes_it_away():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (COPY, KEEP))
        app.bands.unfold()
        await pilot.pause()
        assert "serial INV0002" in text_of(app)
        app.bands.unfold()
        await pilot.pause()
        assert "serial INV0002" not in text_of(app)


async def test_an_unfolded_drive_stays_so_where_it_moves():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (COPY, KEEP))
        app.bands.unfold()
        await shown(pilot, (KEEP, COPY))
        text = text_of(app)
        assert text.index("INVENTED NV-2000") < text.index("serial INV0002")
        assert "serial INV0005" not in text


async def test_a_click_chooses_and_a_second_unfolds():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (COPY, KEEP))
        second = app.bands.query(Band).last()
        await pilot.click(second)
        assert app.bands.chosen == KEEP
        assert "serial INV0005" not in text_of(app)
        await pilot.click(second)
        await pilot.pause()
        assert "serial INV0005" in text_of(app)


@pytest.mark.parametrize(("height", "roomy"), [(24, True), (20, True), (19, False), (10, False)])
async def test_blank_lines_stand_between_bands_only_where_there_is_room_for_all(height, roomy):
    app = Page()
    async with app.run_test(size=(80, height)) as pilot:
        await shown(pilot, MANY[:5])  # 15 rows, and a blank before each
        assert app.bands.has_class("roomy") is roomy
        assert app.bands.max_scroll_y == (0 if height >= 15 else 15 - height)


async def test_time_alone_redraws_only_the_lines_that_tell_it():
    app = Page()
    async with app.run_test(size=(80, 40)) as pilot:
        await shown(pilot, (RETIRE,))
        before = app.bands.query_one(Band).drawn
        await shown(pilot, (RETIRE,), NOW + 60)
        after = app.bands.query_one(Band).drawn
        assert [one == other for one, other in zip(before, after, strict=True)] == [True, True, False]
        assert "read 13 min ago" in text_of(app)
