from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import RETIRE, bays
from tests.dashboard.screen import rows_of, settled, text_of


async def test_the_ticket_is_shown_as_it_would_be_sent_and_switches_hide_names_in_it():
    answers = Answers()
    app = dashboard(answers, bays(RETIRE))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("t")
        await settled(pilot)
        assert "serial INV0001" in text_of(app)
        assert "serial shown, host shown, paths shown." in text_of(app)
        await pilot.press("s", "h")
        await settled(pilot)
        assert "serial S-1" in text_of(app)
        assert "serial hidden, host hidden, paths shown." in text_of(app)
        await pilot.press("s")
        await settled(pilot)
        assert "serial shown, host hidden" in text_of(app)
    assert ("ticket", 1, ["host", "serial"], answers.asked[-1][3]) in answers.asked


async def test_what_is_written_hides_what_the_page_hides_and_is_told():
    answers = Answers()
    app = dashboard(answers, bays(RETIRE))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("t", "o")
        await settled(pilot)
        await pilot.press("w")
        await settled(pilot)
        assert rows_of(app)[-1] == "Written to /home/invented/ticket.json"
    assert answers.asked[-1][:3] == ("save", 1, ["paths"])
