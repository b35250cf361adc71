from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import COPY, RETIRE, bays
from tests.dashboard.screen import settled, text_of


async def opened(pilot) -> str:
    await settled(pilot)
    await pilot.press("b")
    await settled(pilot)
    return text_of(pilot.app)


async def test_the_newest_stands_first():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        text = await opened(pilot)
        assert (
            text.index("Watching began.") < text.index("The call became copy.") < text.index("Pending sectors")
        )
        assert "INVENTED RX-4000: The call became copy." in text


async def test_drive_and_kind_are_sifted_by_a_key_each_and_come_round_again():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await opened(pilot)
        await pilot.press("d")
        await settled(pilot)
        assert "Day book: only Photos, every kind" in text_of(app)
        assert "Nothing of this sort has been written down." in text_of(app)
        await pilot.press("d")
        await settled(pilot)
        assert "only INVENTED RX-4000" in text_of(app)
        assert "Watching began." not in text_of(app)
        await pilot.press("d", "k")
        await settled(pilot)
        assert "all drives, only call" in text_of(app)
        assert "Pending sectors" not in text_of(app)


async def test_words_are_searched_as_they_are_typed_and_escape_shows_all_again():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await opened(pilot)
        await pilot.press("slash", *"Pend")
        await settled(pilot)
        assert "Pending sectors" in text_of(app)
        assert "Watching began." not in text_of(app)
        assert app.is_running
        await pilot.press("escape")
        await settled(pilot)
        assert "Watching began." in text_of(app)


async def test_letters_typed_are_no_keys_and_enter_keeps_what_was_found():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await opened(pilot)
        await pilot.press("slash", *"q", "enter")
        await settled(pilot)
        assert app.is_running
        assert "holding 'q'" in text_of(app)
        await pilot.press("k")
        await settled(pilot)
        assert "only call" in text_of(app)


async def test_an_empty_day_book_says_how_it_begins():
    answers = Answers()
    answers.entries = ()
    app = dashboard(answers, bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        assert "It begins with the first pass: diskwatch watch." in " ".join((await opened(pilot)).split())


async def test_from_the_page_of_a_drive_it_opens_with_that_drive():
    app = dashboard(Answers(), bays(RETIRE, COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("down", "enter")
        await settled(pilot)
        assert "Day book: only INVENTED RX-4000" in await opened(pilot)
