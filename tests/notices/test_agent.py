from dataclasses import dataclass, field
from typing import Any

import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.history import later
from diskwatch.history.later import PutOff, name_of, put_off
from diskwatch.notices.agent import COMMAND, DESKTOP, PUT_OFF, SHOW, Agent, Ways
from diskwatch.notices.desktop import Chosen, NoAnswer, NoDesktop
from diskwatch.notices.memory import FILE, Bubble
from diskwatch.notices.policy import GRACE, Wishes
from diskwatch.notices.sight import Sight
from diskwatch.records import CallWord
from tests.notices.samples import line
from tests.samples import DAY, HDD, NOON, NVME

HOUR = 3600


@dataclass
class Screen:
    """A desktop that remembers; `fault` is raised instead where one is set."""

    shown: list[Any] = field(default_factory=list)
    choices: list[Any] = field(default_factory=list)
    fault: DiskwatchError | None = None

    def reach(self):
        if isinstance(self.fault, NoDesktop) and not isinstance(self.fault, NoAnswer):
            raise self.fault

    def show(self, words, *, actions=(), replaces=None):
        if self.fault is not None:
            raise self.fault
        self.shown.append((words, tuple(key for key, _ in actions), replaces))
        return replaces or Bubble(place="here", number=len(self.shown))

    def chosen(self):
        found, self.choices = tuple(self.choices), []
        return found


class Desk:
    """An agent with all that it tells."""

    def __init__(self, folder, *, wishes=None, hook=True, terminal=True):
        self.folder, self.wishes = folder, wishes or Wishes()
        self.screen, self.said, self.handed, self.opened = Screen(), [], [], []
        self.fault = None
        self.lines = {}
        self.trouble = None
        self.hook, self.terminal = hook, terminal
        self.restart()

    def restart(self):
        self.agent = Agent(
            Ways(
                say=self.said.append,
                screen=self.screen,
                hook=self.hand if self.hook else None,
                about=lambda one, at: {"serial": one.drive.identity.serial, "at": at},
                open=(lambda: self.opened.append(1)) if self.terminal else None,
            ),
            lambda _at: Sight(lines=dict(self.lines), trouble=self.trouble),
            self.folder,
            self.wishes,
            lambda at: at % DAY // 60,
        )

    def hand(self, told):
        self.handed.append(told)
        if self.fault is not None:
            raise self.fault

    def sees(self, *lines):
        self.lines = {name_of(one.drive.identity): one for one in lines}

    @property
    def summaries(self):
        return [words.summary.split()[0] for words, _, _ in self.screen.shown]


@pytest.fixture
def desk(tmp_path):
    return Desk(tmp_path / "own")


def test_a_change_of_call_goes_to_screen_program_and_log_once_each(desk):
    desk.sees(line("copy"))
    for minute in range(5):
        desk.agent.turn(NOON + minute * 60)
    assert desk.summaries == ["Copy"]
    (handed,) = desk.handed
    assert (handed["schema"], handed["about"], handed["urgency"]) == ("diskwatch/notice/1", "call", "critical")
    assert handed["drive"]["serial"] == "INV0001"
    assert [told for told in desk.said if told.startswith("Copy the data off")]


def test_nothing_is_told_twice_across_restarts_of_the_agent(desk):
    desk.sees(line("look"))
    for minute in range(20):
        desk.agent.turn(NOON + minute * 60)
        desk.restart()
    assert (desk.summaries, len(desk.handed)) == (["Look"], 1)


def test_an_agent_that_is_killed_between_writing_down_and_telling_tells_nothing_twice(desk):
    class Killed(BaseException):
        pass

    def kill(*_words, **_more):
        raise Killed

    desk.sees(line("copy"))
    desk.screen.show = kill
    with pytest.raises(Killed):
        desk.agent.turn(NOON)
    desk.screen.__dict__.pop("show")
    desk.restart()
    desk.agent.turn(NOON + 60)
    assert desk.summaries == []
    assert len(desk.handed) == 1


def test_while_the_desktop_is_out_of_reach_notices_wait_and_the_program_runs_once(desk):
    desk.screen.fault = NoDesktop("there is no session bus here")
    desk.sees(line("copy"))
    for minute in range(10):
        desk.agent.turn(NOON + minute * 60)
    assert len(desk.handed) == 1
    assert len([told for told in desk.said if "session bus" in told]) == 1
    assert desk.agent.memory.failures[DESKTOP].text == "there is no session bus here"
    desk.screen.fault = None
    desk.agent.turn(NOON + HOUR)
    desk.agent.turn(NOON + HOUR + 60)
    assert desk.summaries == ["Copy"]
    assert "the desktop can be reached again" in desk.said


def test_a_notice_that_may_be_on_the_screen_is_not_sent_again(desk):
    desk.screen.fault = NoAnswer("no answer")
    desk.sees(line("look"))
    desk.agent.turn(NOON)
    desk.screen.fault = None
    desk.agent.turn(NOON + 60)
    assert desk.summaries == []


def test_a_program_that_fails_is_a_line_in_log_and_state_and_is_not_run_twice_for_one_change(desk):
    desk.fault = DiskwatchError("the command mail ended with 1")
    desk.sees(line("look"))
    desk.agent.turn(NOON)
    desk.restart()
    desk.agent.turn(NOON + 60)
    assert len(desk.handed) == 1
    assert desk.said.count("the command mail ended with 1") == 1
    assert desk.agent.memory.failures[COMMAND].at == NOON
    assert desk.summaries == ["Look"]


def test_a_notice_takes_the_place_of_the_earlier_one_of_the_same_drive_also_after_a_restart(desk):
    desk.sees(line("look"), line("look", drive=NVME, number=2))
    desk.agent.turn(NOON)
    first = dict(desk.agent.memory.bubbles)
    desk.restart()
    desk.sees(line("copy"), line("look", drive=NVME, number=2))
    desk.agent.turn(NOON + 60)
    assert [replaces for _, _, replaces in desk.screen.shown] == [
        None,
        None,
        first["Nordwall NW4000 INVENTED INV0001"],
    ]


def test_the_button_puts_off_as_the_command_does(desk):
    desk.sees(line("retire"))
    desk.agent.turn(NOON)
    (bubble,) = desk.agent.memory.bubbles.values()
    desk.screen.choices.append(Chosen(bubble=bubble, action=PUT_OFF))
    desk.agent.listen(NOON + 60)
    by_command = later.read(desk.folder, NOON)
    assert by_command == {
        "Nordwall NW4000 INVENTED INV0001": PutOff(until=NOON + 60 + later.DAYS * DAY, call=CallWord.RETIRE)
    }
    for hour in range(1, 7 * 24):
        desk.agent.turn(NOON + hour * HOUR)
    assert desk.summaries == ["Stop"]
    desk.agent.turn(NOON + 60 + later.DAYS * DAY)
    assert desk.summaries == ["Stop", "Stop"]


def test_what_was_put_off_from_a_terminal_is_quiet_until_the_call_becomes_stronger(desk):
    put_off(desk.folder, HDD.identity, PutOff(until=NOON + 9 * DAY, call=CallWord.LOOK), NOON)
    desk.sees(line("look"))
    desk.agent.turn(NOON)
    assert desk.summaries == []
    desk.sees(line("copy"))
    desk.agent.turn(NOON + 60)
    assert desk.summaries == ["Copy"]


def test_the_dashboard_opens_by_the_action_that_is_offered_only_where_something_can_open_it(desk, tmp_path):
    desk.sees(line("look"))
    desk.agent.turn(NOON)
    assert desk.screen.shown[0][1] == (SHOW, PUT_OFF)
    (bubble,) = desk.agent.memory.bubbles.values()
    desk.screen.choices.append(Chosen(bubble=bubble, action=SHOW))
    desk.agent.listen(NOON)
    assert desk.opened == [1]
    bare = Desk(tmp_path / "bare", terminal=False)
    bare.sees(line("look"))
    bare.agent.turn(NOON)
    assert bare.screen.shown[0][1] == (PUT_OFF,)


def test_a_choice_about_a_notice_that_is_none_of_ours_does_nothing(desk):
    desk.sees(line("look"))
    desk.agent.turn(NOON)
    desk.screen.choices.append(Chosen(bubble=Bubble(place="elsewhere", number=1), action=PUT_OFF))
    desk.agent.listen(NOON)
    assert later.read(desk.folder, NOON) == {}


def test_a_watch_in_trouble_is_told_after_a_while_and_one_that_restarts_is_not(desk):
    desk.sees(line("keep"))
    for minute in range(60):
        desk.trouble = "Nobody is watching the drives." if minute % 10 < 9 else None
        desk.agent.turn(NOON + minute * 60)
    assert desk.summaries == []
    desk.trouble = "Nobody is watching the drives."
    for minute in range(60, 60 + GRACE // 60 + 2):
        desk.agent.turn(NOON + minute * 60)
    assert desk.summaries == ["Drives:"]
    assert desk.handed[0]["drive"] is None


def test_a_folder_that_cannot_be_written_keeps_no_warning_back_and_is_said_once(desk, tmp_path):
    (tmp_path / "own").write_text("in the way")
    desk.sees(line("retire"))
    for minute in range(5):
        desk.agent.turn(NOON + minute * 60)
    assert desk.summaries == ["Stop"]
    assert len([told for told in desk.said if FILE in told]) == 1


def test_the_monthly_word_names_how_many_drives_are_watched(tmp_path):
    desk = Desk(tmp_path, wishes=Wishes(monthly=True))
    desk.sees(line("keep"), line("keep", drive=NVME, number=2))
    for day in range(31):
        desk.agent.turn(NOON + day * DAY)
    assert len(desk.screen.shown) == 2
    assert "All 2 drives are called keep" in desk.screen.shown[0][0].body
