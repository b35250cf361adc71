import pytest

from diskwatch.dashboard.drive_screen import DriveScreen
from diskwatch.errors import HistoryError
from diskwatch.units import DAY
from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import COPY, UNREAD, bays
from tests.dashboard.screen import rows_of, settled, text_of


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (200, 60)])
async def test_one_drive_is_told_with_band_picture_and_signals(size):
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        text = text_of(app)
        assert "copy" in text
        assert "Pending sectors rose from 0 to 24 in 9 powered days." in text
        assert "Percentage used: 71 %" in text
        assert "Signals, the last month" in text
        assert " > Percentage used" in text


async def test_why_and_what_would_change_the_call_follow_below():
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=(100, 90)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        text = text_of(app)
        assert text.index("Copy it off now.") < text.index("What would change the call")
        assert "Finding drift:media: The above" in text


async def test_the_arrows_choose_the_signal_that_is_shown_large():
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=(80, 40)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        await pilot.press("right")
        await pilot.pause()
        assert "Temperature: 41 °C" in text_of(app)
        await pilot.press("left", "left")
        await pilot.pause()
        assert "Self-assessment: passed" in text_of(app)
        assert "told in words" in text_of(app)


async def test_every_span_of_time_has_a_key():
    answers = Answers()
    app = dashboard(answers, bays(COPY))
    async with app.run_test(size=(80, 40)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        for key, told in (
            ("d", "the last day"),
            ("w", "the last week"),
            ("y", "the last year"),
            ("a", "all that"),
        ):
            await pilot.press(key)
            await settled(pilot)
            assert f"Signals, {told}" in text_of(app)
    asked = [question[2] for question in answers.asked if question[0] == "curves"]
    assert asked == [30 * DAY, DAY, 7 * DAY, 365 * DAY, 90 * DAY]


async def test_what_cannot_be_answered_is_said_in_the_place_of_the_answer():
    app = dashboard(Answers(HistoryError("history.db: gone")), bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        assert "history.db: gone" in text_of(app)
        assert rows_of(app)[-1].endswith("q quit")


async def test_a_drive_that_could_not_be_read_says_why_where_its_signals_would_stand():
    answers = Answers()
    answers.drawn = ()
    app = dashboard(answers, bays(UNREAD))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        assert "No signal of it is known. Reading /dev/sde needs the right to do so." in " ".join(
            text_of(app).split()
        )


async def test_escape_leads_back_to_the_bays():
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        assert isinstance(app.screen, DriveScreen)
        await pilot.press("escape")
        await pilot.pause()
        assert rows_of(app)[1].startswith("▓> copy") or "▓> copy" in text_of(app)
