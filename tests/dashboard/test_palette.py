from diskwatch.dashboard.drive_screen import DriveScreen
from diskwatch.dashboard.palette import Palette
from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import COPY, RETIRE, bays
from tests.dashboard.screen import settled, text_of


async def test_every_deed_of_every_drive_is_listed_and_typing_narrows_it():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(100, 30)) as pilot:
        await settled(pilot)
        await pilot.press("colon")
        await settled(pilot)
        assert isinstance(app.screen, Palette)
        assert len(app.screen.found()) == 2 * 4 + 5
        await pilot.press(*"plan rx")
        await settled(pilot)
        assert [deed.number for deed in app.screen.found()] == [COPY.number]
        assert "plan of INVENTED RX-4000 (sdc)" in text_of(app)


async def test_enter_does_what_is_chosen_for_that_drive():
    answers = Answers()
    app = dashboard(answers, bays(RETIRE, COPY))
    async with app.run_test(size=(100, 30)) as pilot:
        await settled(pilot)
        await pilot.press("enter", "colon")
        await settled(pilot)
        await pilot.press(*"sdc", "enter")
        await settled(pilot)
        assert isinstance(app.screen, DriveScreen)
        assert app.screen.number == COPY.number
        assert len(app.screen_stack) == 2


async def test_the_arrows_go_through_the_list():
    app = dashboard(Answers(), bays(RETIRE))
    async with app.run_test(size=(100, 30)) as pilot:
        await settled(pilot)
        await pilot.press("colon", "down", "enter")
        await settled(pilot)
        assert "Copy plan: Photos" in text_of(app)


async def test_what_is_called_by_no_such_name_is_said_and_does_nothing():
    app = dashboard(Answers(), bays(RETIRE))
    async with app.run_test(size=(100, 30)) as pilot:
        await settled(pilot)
        await pilot.press("colon", *"zzz", "enter")
        await settled(pilot)
        assert "Nothing is called so." in text_of(app)
        await pilot.press("escape")
        await settled(pilot)
        assert "█> retire" in text_of(app) or "retire" in text_of(app)
