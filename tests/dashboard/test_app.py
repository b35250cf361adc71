import statistics
import threading
import time
from dataclasses import replace

import pytest
from textual.message import Message
from textual.pilot import Pilot

from diskwatch.dashboard.app import Dashboard
from diskwatch.dashboard.help import Help
from diskwatch.errors import HistoryError
from diskwatch.records import Bays
from tests.dashboard.answers import Answers, dashboard
from tests.dashboard.drives import ALL, COPY, KEEP, NOW, bays
from tests.dashboard.screen import contrast, redraw, rows_of, settled, shades_of, text_of

MANY = tuple(replace(COPY, number=number, label=f"Drive {number:02}") for number in range(1, 21))


_DRAWN = "░▒▓█▁▂▃▄▅▆▇─│└· " + "".join(map(chr, range(0x2800, 0x2900)))
"""What pictures are made of."""


class Stage:
    """A source and a clock that the test moves; it remembers in which threads it was asked."""

    def __init__(self, answer: Bays | Exception) -> None:
        self.answer = answer
        self.time = NOW
        self.threads: set[str] = set()
        self.asked = 0

    def source(self, at: int) -> Bays:
        self.threads.add(threading.current_thread().name)
        self.asked += 1
        if isinstance(self.answer, Exception):
            raise self.answer
        return replace(self.answer, at=at)

    def now(self) -> int:
        return self.time

    def dashboard(self) -> Dashboard:
        return Dashboard(self.source, self.now, watching="watching from here", every=1_800)


async def again(pilot: Pilot[None]) -> None:
    """Let a second pass."""
    assert isinstance(pilot.app, Dashboard)
    pilot.app.tick()
    await settled(pilot)


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (200, 50)])
async def test_all_drives_are_seen_at_once_at_every_usual_size(size):
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=size) as pilot:
        await settled(pilot)
        text = text_of(app)
        for known in ("retire", "copy", "look", "unread", "keep", "no SMART", "reads 12/s 4.2 MB/s 6.2 ms"):
            assert known in text
        assert "last pass 12 minutes ago  watched by process 1234" in rows_of(app)[0]
        assert rows_of(app)[-1].endswith("q quit")


async def test_a_tiny_screen_keeps_its_shape():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(40, 10)) as pilot:
        await settled(pilot)
        rows = rows_of(app)
        assert len(rows) == 10
        assert rows[0] == "last pass 12 min ago     watched by 1234"
        assert rows[1].startswith("█> retire")
        assert rows[9] == "↑ ↓ move  Space unfold  ? help  q quit"


async def test_the_source_is_asked_in_one_thread_that_is_not_the_screens():
    stage = Stage(bays(*ALL))
    app = stage.dashboard()
    async with app.run_test() as pilot:
        await settled(pilot)
        await again(pilot)
        await again(pilot)
    assert stage.asked >= 3
    assert len(stage.threads) == 1
    assert threading.current_thread().name not in stage.threads


async def test_a_message_comes_only_when_something_changed():
    heard: list[Message] = []
    stage = Stage(bays(KEEP))
    app = stage.dashboard()

    def hear(message: Message) -> None:
        if isinstance(message, Dashboard.Fresh):
            heard.append(message)

    async with app.run_test(message_hook=hear) as pilot:
        await settled(pilot)
        await again(pilot)
        assert len({id(message) for message in heard}) == 1
        stage.answer = bays(COPY)
        await again(pilot)
        assert len({id(message) for message in heard}) == 2
        assert app.snapshot is not None
        assert app.snapshot.bays is not None
        assert app.snapshot.bays.drives == (COPY,)


async def test_times_pass_on_the_screen_without_anything_new():
    stage = Stage(bays(KEEP))
    app = stage.dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        stage.time += 180
        await again(pilot)
        assert "last pass 15 minutes ago" in rows_of(app)[0]
        assert "read 15 min ago" in text_of(app)


async def test_that_nobody_is_watching_is_said_aloud():
    app = Stage(bays(KEEP, watcher=None)).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        assert rows_of(app)[0].endswith("NOBODY IS WATCHING")
        assert rows_of(app)[1].startswith("! Nobody is watching")


async def test_old_figures_are_called_old():
    stage = Stage(bays(KEEP))
    app = stage.dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        stage.time += 7_200
        await again(pilot)
        assert rows_of(app)[1] == "! Old figures: a pass is due every 30 minutes, the last was 2 hours ago."


async def test_an_empty_history_says_why_and_what_to_do():
    app = Stage(bays(watcher=None)).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        text = " ".join(text_of(app).split())
        assert "No drive has been read yet, because nobody is watching so far." in text
        assert "This screen: watching from here. If nothing comes, run diskwatch watch --once" in text


async def test_a_source_that_fails_at_once_leaves_a_screen_that_says_so():
    app = Stage(HistoryError("history.db: permission denied", hint="run as its owner")).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        assert "The drives cannot be shown: history.db: permission denied; run as its owner" in " ".join(
            text_of(app).split()
        )
        assert rows_of(app)[0].endswith("no pass known yet  watching from here")


async def test_a_source_that_fails_later_leaves_the_drives_on_the_screen():
    stage = Stage(bays(COPY))
    app = stage.dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        stage.answer = HistoryError("history.db: gone")
        await again(pilot)
        assert rows_of(app)[1] == "! Not up to date: history.db: gone"
        assert "INVENTED RX-4000" in text_of(app)
        stage.answer = bays(COPY)
        await again(pilot)
        assert "Not up to date" not in text_of(app)


async def test_a_source_that_keeps_silent_is_not_asked_twice_and_is_named():
    stage = Stage(bays(KEEP))
    gate = threading.Event()
    slow = stage.source

    def blocked(at: int) -> Bays:
        gate.wait(10)
        return slow(at)

    app = Dashboard(blocked, stage.now, watching="watching from here", every=1_800)
    try:
        async with app.run_test(size=(80, 24)) as pilot:
            stage.time += 9
            app.tick()
            app.tick()
            await pilot.pause()
            assert rows_of(app)[1] == "! Not up to date: the history has not answered for 9 seconds."
            gate.set()
            await settled(pilot)
            assert stage.asked == 1
            assert "INVENTED NV-2000" in text_of(app)
    finally:
        gate.set()


async def test_the_arrows_and_their_kin_move_the_choice():
    app = Stage(bays(*MANY)).dashboard()
    async with app.run_test(size=(80, 14)) as pilot:
        await settled(pilot)
        places = []
        for key in ("down", "down", "up", "pagedown", "end", "pageup", "home"):
            await pilot.press(key)
            await pilot.pause()
            (row,) = [row for row in rows_of(app) if row[1:2] == ">"]
            places.append(int(row.split("Drive ")[1][:2]))
        assert places == [2, 3, 2, 6, 20, 16, 1]


async def test_space_unfolds_the_chosen_drive():
    app = Stage(bays(COPY, KEEP)).dashboard()
    async with app.run_test(size=(80, 30)) as pilot:
        await settled(pilot)
        await pilot.press("down", "space")
        await pilot.pause()
        assert "serial INV0005" in text_of(app)


async def test_looking_again_asks_the_source_and_says_so():
    stage = Stage(bays(KEEP))
    app = stage.dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        asked = stage.asked
        await pilot.press("r")
        await settled(pilot)
        assert stage.asked == asked + 1
        assert rows_of(app)[-1].startswith("Looked again at ")
        assert rows_of(app)[-1].endswith(": nothing new.")
        stage.time += 7
        await again(pilot)
        assert rows_of(app)[-1].endswith("q quit")


async def test_help_opens_and_the_same_key_leads_back():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("question_mark")
        await pilot.pause()
        assert isinstance(app.screen, Help)
        assert "What to do with a drive" in text_of(app)
        await pilot.press("end")
        await pilot.pause()
        assert "It was opened like this: watching from here." in text_of(app)
        await again(pilot)  # the second that passes meanwhile must find its widgets
        await pilot.press("question_mark")
        await pilot.pause()
        assert "█> retire" in text_of(app)


@pytest.mark.parametrize("key", ["q", "ctrl+c", "ctrl+q"])
async def test_quitting_ends_the_application(key):
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test() as pilot:
        await settled(pilot)
        await pilot.press(key)
        await pilot.pause()
        assert not app.is_running
    assert app.return_code == 0


async def test_quitting_works_from_the_help_page_too():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test() as pilot:
        await settled(pilot)
        await pilot.press("question_mark", "q")
        await pilot.pause()
        assert not app.is_running


async def test_help_on_a_tiny_screen_still_shows_the_way_back():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(40, 10)) as pilot:
        await settled(pilot)
        await pilot.press("question_mark")
        await pilot.pause()
        assert rows_of(app)[-1] == "? Esc back  ↑ ↓ read  q quit"
        await pilot.press("escape")
        await pilot.pause()
        assert rows_of(app)[1].startswith("█> retire")


async def test_a_click_on_a_deed_does_it():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.click(offset=(rows_of(app)[-1].index("help"), 23))
        await pilot.pause()
        assert isinstance(app.screen, Help)


async def test_the_background_turns_light_and_back():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test() as pilot:
        await settled(pilot)
        dark = [app.current_theme.dark]
        for _ in range(2):
            await pilot.press("l")
            dark.append(app.current_theme.dark)
        assert dark == [True, False, True]


@pytest.mark.parametrize("turned", [False, True])
@pytest.mark.parametrize("no_color", [False, True])
async def test_every_letter_stands_out_from_its_background(monkeypatch, turned, no_color):
    if no_color:
        monkeypatch.setenv("NO_COLOR", "1")
    app = dashboard(Answers(), bays(*ALL, watcher=None))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        if turned:
            await pilot.press("l")
            await pilot.pause()
        for key in (
            "",
            "enter",
            "right",
            "escape",
            "b",
            "escape",
            "t",
            "escape",
            "question_mark",
            "escape",
            "colon",
        ):
            if key:
                await pilot.press(key)
                await settled(pilot)
            shades = shades_of(app)
            words = [shade for shade in shades if shade.text.strip(_DRAWN)]
            assert len(words) > 10
            # WCAG 2.2, success criteria 1.4.3 for text and 1.4.11 for what is drawn.
            assert [shade for shade in words if contrast(shade.front, shade.back) < 4.5] == []
            assert [shade for shade in shades if contrast(shade.front, shade.back) < 3] == []


async def test_without_colours_the_bar_keeps_the_colour_of_the_letters(monkeypatch):
    monkeypatch.setenv("NO_COLOR", "1")
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        shades = shades_of(app)
        bars = {shade.front for shade in shades if shade.text.startswith(("█", "▓", "▒", "░"))}
        letters = {shade.front for shade in shades if "Photos" in shade.text}
        assert bars == letters


async def test_a_screen_that_changes_its_size_is_laid_anew():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pilot.resize_terminal(40, 10)
        await pilot.pause()
        await pilot.pause()
        assert rows_of(app)[0] == "last pass 12 min ago     watched by 1234"
        assert all(len(row) <= 40 for row in rows_of(app))


@pytest.mark.bench
async def test_a_whole_redraw_takes_less_than_a_sixtieth_of_a_second():
    app = Stage(bays(*ALL)).dashboard()
    async with app.run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        taken = []
        for _ in range(15):
            # Processor time, so that other work on the machine does not count.
            start = time.process_time()
            redraw(app)
            taken.append(time.process_time() - start)
            await pilot.pause()
        assert statistics.median(taken) <= 0.016


async def test_notices_are_put_off_only_where_the_key_is_pressed_twice():
    answers = Answers()
    app = dashboard(answers, bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("p")
        await settled(pilot)
        assert "p once more puts the notices about INVENTED RX-4000 off" in rows_of(app)[-1]
        assert not any(question[0] == "put_off" for question in answers.asked)
        await pilot.press("p")
        await settled(pilot)
        assert rows_of(app)[-1] == "Notices are put off until Tuesday."
        assert answers.asked[-1][:2] == ("put_off", COPY.number)


async def test_a_page_is_never_stacked_on_one_of_its_sort():
    app = dashboard(Answers(), bays(*ALL))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        await pilot.press("enter", "c", "t", "c", "enter", "t", "b", "c")
        await settled(pilot)
        sorts = [type(screen) for screen in app.screen_stack]
        assert len(sorts) == len(set(sorts))


async def test_the_line_through_time_of_a_drive_that_wants_something_stands_in_its_band():
    app = dashboard(Answers(), bays(COPY))
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot)
        row = next(row for row in rows_of(app) if "│" in row)
        assert "c│" in row
        assert "[]" in row or "[═" in row
        assert "margin 60 days to 3 months" in row
