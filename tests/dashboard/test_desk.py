import pytest
from rich.text import Text

from diskwatch.dashboard.desk import Desk
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.weight import Face
from diskwatch.errors import DiskwatchError, HistoryError
from tests.dashboard.drives import ALL, COPY, NOW, bays


class Timed(Desk):
    """A desk whose reader's time the test moves."""

    def __init__(self) -> None:
        self.time = [0.0]
        super().__init__(
            lambda: NOW,
            questions=None,
            watching="watching from here",
            every=1_800,
            face=Face(),
            steady=lambda: self.time[0],
        )


@pytest.fixture
def desk():
    made = Timed()
    yield made
    made.asker.shutdown()


def test_what_was_said_stands_for_some_seconds_of_the_readers_own_time(desk):
    desk.say("Put off.")
    assert desk.said(80).plain == "Put off."
    assert [row.plain for row in desk.over((Text("a keys"), Text("q quit")), 80)] == ["a keys", "Put off."]
    desk.time[0] = 7.0
    assert desk.said(80) is None
    assert [row.plain for row in desk.over((Text("a keys"), Text("q quit")), 80)] == ["a keys", "q quit"]


def test_drives_are_found_by_number_once_they_are_known(desk):
    assert desk.lines() == ()
    assert desk.line(COPY.number) is None
    desk.snapshot = Snapshot(bays=bays(*ALL), error=None)
    assert desk.line(COPY.number) == COPY
    assert desk.line(99) is None
    assert desk.strand(COPY.number) is None


async def test_an_error_of_ours_comes_as_it_is_and_a_fault_as_one_that_can_be_told(desk):
    def ours() -> None:
        raise HistoryError("history.db: gone")

    def fault() -> None:
        raise ZeroDivisionError("by zero")

    assert await desk.ask(lambda: 7) == 7
    with pytest.raises(HistoryError, match="gone"):
        await desk.ask(ours)
    with pytest.raises(DiskwatchError, match="a fault of its own: ZeroDivisionError"):
        await desk.ask(fault)


def test_an_answer_that_is_owed_for_long_is_a_trouble(desk):
    desk.asked_at = 0.0
    desk.time[0] = 9.0
    assert desk.troubles() == ("Not up to date: the history has not answered for 9 seconds.",)
    (row,) = desk.notes(80, 24)
    assert row.plain.startswith("! Not up to date")


def test_without_a_rehearsal_there_is_no_banner_and_with_one_it_says_that_all_is_invented(desk):
    class Scene:
        def banner(self) -> str:
            return "day 3 of 30"

    assert desk.banner(80) == ()
    desk.stage = Scene()
    assert desk.banner(80)[0].plain == " INVENTED  day 3 of 30"
