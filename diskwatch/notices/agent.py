"""The agent: looks at the history now and then, and tells a person what changed by the ways that there are.

It writes to no history, needs no rights beyond reading one, and keeps what it told in the user's own folder. Of
each notice it is first written down that it was told, and then it is told: whatever ends the agent in between,
nothing is told twice. Where a way was out of reach, that is taken back and tried again at the next look.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Protocol

from diskwatch.errors import DiskwatchError
from diskwatch.history import later
from diskwatch.notices import memory, policy, wording
from diskwatch.notices.desktop import Chosen, NoAnswer
from diskwatch.notices.memory import Bubble, Failure, Memory
from diskwatch.notices.policy import About, Due, Seen, Wishes
from diskwatch.notices.sight import Sight
from diskwatch.notices.wording import Words
from diskwatch.records import DriveLine
from diskwatch.units import DAY, rfc3339

SCHEMA = "diskwatch/notice/1"
DESKTOP = "desktop"
COMMAND = "command"
LOG = "log"

SHOW = "default"
"""The action that opens the dashboard; by this name a click on the notice itself does so too."""

PUT_OFF = "later"
"""The action that puts the notices of the drive off."""


class Screen(Protocol):
    """What shows notices; `diskwatch.notices.desktop.Desktop` is the real one."""

    def reach(self) -> None:
        """See whether a notice could be shown; raises `diskwatch.errors.DiskwatchError` where not."""

    def show(
        self, words: Words, *, actions: Sequence[tuple[str, str]] = (), replaces: Bubble | None = None
    ) -> Bubble:
        """Show a notice; raises `diskwatch.errors.DiskwatchError` where that is not possible."""

    def chosen(self) -> tuple[Chosen, ...]:
        """What people have chosen since this was last asked."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Ways:
    """By which ways people are told.

    Attributes:
        say: writes one line to the agent's log.
        screen: the desktop; None for none.
        hook: hands one notice to the owner's program; raises `diskwatch.errors.DiskwatchError`. None for none.
        about: what a notice says of a drive as plain JSON values.
        open: opens the dashboard; None where nothing can open it.
    """

    say: Callable[[str], None]
    screen: Screen | None = None
    hook: Callable[[Mapping[str, object]], None] | None = None
    about: Callable[[DriveLine, int], Mapping[str, object]]
    open: Callable[[], None] | None = None


@dataclass(slots=True)
class _Moment:
    """What only this run of the agent knows.

    Attributes:
        troubled_since: since when the watch has been in trouble, UTC seconds; None where it is in none.
        said: the line that stands about each thing that is said once.
    """

    troubled_since: int | None = None
    said: dict[str, str] = field(default_factory=dict)


class Agent:
    """One user's agent."""

    def __init__(
        self,
        ways: Ways,
        look: Callable[[int], Sight],
        folder: Path,
        wishes: Wishes,
        minute: Callable[[int], int],
    ) -> None:
        """Take up what was told before.

        Args:
            ways: by which people are told.
            look: what the history shows at a time, UTC seconds since 1970.
            folder: the user's own state folder.
            wishes: what the owner wants.
            minute: the minute of the local day at a time.
        """
        self._ways = ways
        self._look = look
        self._folder = folder
        self._wishes = wishes
        self._minute = minute
        self._memory = memory.read(folder)
        self._moment = _Moment()

    @property
    def memory(self) -> Memory:
        """What was told so far."""
        return self._memory

    def turn(self, now: int) -> None:
        """Look once, and tell what is to be told.

        Args:
            now: UTC seconds since 1970.
        """
        sight = self._look(now)
        seen = self._seen(sight, now)
        for way, tell in self._tellers(now):
            state = policy.settled(self._memory.of(way), seen, now)
            for one in policy.due(state, seen, self._wishes, now, self._minute(now)):
                words = _words(one, sight, now)
                if words is None:
                    continue
                before, after = self._memory, self._memory.told(way, policy.told(state, one, now))
                self._keep(after)
                if tell(one, words, sight, now):
                    state = policy.told(state, one, now)
                else:
                    # Only what was told is taken back; what the way said of its failure stays.
                    self._keep(replace(self._memory, ways=before.ways))
                    break
            if state != self._memory.of(way):
                self._keep(self._memory.told(way, state))

    def listen(self, now: int) -> None:
        """Do what people have chosen on the screen.

        Args:
            now: UTC seconds since 1970.
        """
        if self._ways.screen is None:
            return
        for one in self._ways.screen.chosen():
            names = [name for name, bubble in self._memory.bubbles.items() if bubble == one.bubble]
            if one.action == SHOW and self._ways.open is not None:
                self._attempt(self._ways.open)
            elif one.action == PUT_OFF and names:
                self._put_off(names[0], now)

    def _tellers(self, now: int) -> tuple[tuple[str, Callable[[Due, Words, Sight, int], bool]], ...]:
        found: list[tuple[str, Callable[[Due, Words, Sight, int], bool]]] = [(LOG, self._log)]
        if self._reaches(now):
            found.append((DESKTOP, self._show))
        if self._ways.hook is not None:
            found.append((COMMAND, self._hand_over))
        return tuple(found)

    def _log(self, _due: Due, words: Words, _sight: Sight, _now: int) -> bool:
        self._ways.say(f"{words.summary}: {words.body}")
        return True

    def _show(self, due: Due, words: Words, _sight: Sight, now: int) -> bool:
        screen = self._ways.screen
        if screen is None:
            return False
        about = due.drive or due.about.value
        actions = [] if self._ways.open is None else [(SHOW, "Show")]
        if due.drive is not None and due.call is not None and due.call in policy.REPEATS:
            actions.append((PUT_OFF, f"Put off {later.DAYS} days"))
        try:
            bubble = screen.show(words, actions=actions, replaces=self._memory.bubbles.get(about))
        except NoAnswer as error:
            # It may stand on the screen; once more would then be twice.
            self._fail(DESKTOP, str(error), now)
            return True
        except DiskwatchError as error:
            self._fail(DESKTOP, str(error), now)
            return False
        self._moment.said.pop(DESKTOP, None)
        self._keep(self._memory.shown(about, bubble))
        return True

    def _hand_over(self, due: Due, words: Words, sight: Sight, now: int) -> bool:
        if self._ways.hook is None:
            return False
        line = None if due.drive is None else sight.lines[due.drive]
        try:
            self._ways.hook(
                notice(words, now, about=due.about.value, repeated=due.repeated)
                | {"drive": None if line is None else self._ways.about(line, now)}
            )
        except DiskwatchError as error:
            # The program may have done its work all the same: it is not started twice for one change.
            self._moment.said.pop(COMMAND, None)
            self._fail(COMMAND, str(error), now)
        return True

    def _put_off(self, name: str, now: int) -> None:
        line = self._look(now).lines.get(name)
        if line is None:
            return
        until = now + later.DAYS * DAY
        word = None if line.call is None else line.call.word
        self._attempt(
            lambda: later.put_off(self._folder, line.drive.identity, later.PutOff(until=until, call=word), now)
        )

    def _seen(self, sight: Sight, now: int) -> Seen:
        if sight.trouble is None or self._moment.troubled_since is None or now < self._moment.troubled_since:
            self._moment.troubled_since = None if sight.trouble is None else now
        since = self._moment.troubled_since
        return Seen(
            calls={name: line.call.word for name, line in sight.lines.items() if line.call is not None},
            put_off=later.read(self._folder, now),
            troubled_for=None if since is None else now - since,
        )

    def _reaches(self, now: int) -> bool:
        """Whether there is a desktop; says once when it goes out of reach, and when it is back."""
        if self._ways.screen is None:
            return False
        try:
            self._ways.screen.reach()
        except DiskwatchError as error:
            self._fail("reach", str(error), now, more="notices wait until it can be reached")
            return False
        if self._moment.said.pop("reach", None) is not None:
            self._ways.say("the desktop can be reached again")
        return True

    def _fail(self, about: str, text: str, now: int, *, more: str = "") -> None:
        """Say once, and write down, that a way failed."""
        way = COMMAND if about == COMMAND else DESKTOP
        if self._say_once(about, f"{text}; {more}" if more else text):
            self._keep(self._memory.failed(way, Failure(at=now, text=text)))

    def _say_once(self, about: str, text: str) -> bool:
        if self._moment.said.get(about) == text:
            return False
        self._moment.said[about] = text
        self._ways.say(text)
        return True

    def _attempt(self, deed: Callable[[], object]) -> None:
        try:
            deed()
        except DiskwatchError as error:
            self._ways.say(str(error))

    def _keep(self, new: Memory) -> None:
        """Remember; where the file cannot be written people are told all the same."""
        self._memory = new
        try:
            memory.keep(self._folder, new)
        except DiskwatchError as error:
            self._say_once("memory", f"{error}; after a restart of the agent notices may come twice")
        else:
            self._moment.said.pop("memory", None)


def notice(words: Words, now: int, *, about: str, repeated: bool = False) -> dict[str, object]:
    """A notice as the owner's program gets it; a notice of a drive has the drive besides.

    Args:
        words: what it says.
        now: UTC seconds since 1970.
        about: what it is about.
        repeated: whether the same was told before.
    """
    return {
        "schema": SCHEMA,
        "at": rfc3339(now),
        "about": about,
        "repeated": repeated,
        "urgency": words.urgency.name.lower(),
        "summary": words.summary,
        "body": words.body,
        "drive": None,
    }


def _words(due: Due, sight: Sight, now: int) -> Words | None:
    match due.about:
        case About.TROUBLE:
            return None if sight.trouble is None else wording.of_trouble(sight.trouble)
        case About.CALM:
            return wording.of_calm(len(sight.lines), now)
        case About.CALL:
            line = None if due.drive is None else sight.lines.get(due.drive)
            return None if line is None or line.call is None else wording.of_call(line, line.call, now)
