"""The desktop, over D-Bus (Desktop Notifications Specification 1.2): show a notice, hear what a person chooses.

Whatever can go wrong on the way (no session bus, no server on it, one that answers with an error or not at all)
is `NoDesktop`, one sentence. The next call tries everything anew, so that a bus or a server that comes back is
found again by itself.
"""

import html
import os
from collections import deque
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, TypeVar

from jeepney import DBusAddress, HeaderFields, MatchRule, Message, message_bus, new_method_call
from jeepney.io.blocking import DBusConnection, open_dbus_connection
from jeepney.wrappers import DBusErrorResponse, unwrap_msg

from diskwatch.errors import DiskwatchError
from diskwatch.notices.memory import Bubble
from diskwatch.notices.wording import Words
from diskwatch.units import plain

PATIENCE = 10.0
"""Seconds that the bus and the server get for an answer."""

_MOST_SIGNALS = 64

_NAME = "org.freedesktop.Notifications"
_SERVER = DBusAddress("/org/freedesktop/Notifications", bus_name=_NAME, interface=_NAME)
_THE_BUS = DBusAddress(
    "/org/freedesktop/DBus", bus_name="org.freedesktop.DBus", interface="org.freedesktop.DBus"
)

_Answer = TypeVar("_Answer")


class NoDesktop(DiskwatchError):
    """No notice can be shown on this user's desktop."""


class NoAnswer(NoDesktop):
    """The server took a notice and did not say what became of it: it may be on the screen."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Chosen:
    """A person chose one of a notice's actions.

    Attributes:
        bubble: the notice.
        action: the action's key.
    """

    bubble: Bubble
    action: str


@dataclass(slots=True)
class _Link:
    """A connection to a session bus.

    Attributes:
        bus: the connection.
        guid: which bus it is: two have never the same.
        owner: the connection of the server that was asked last, or None.
        offers: what that server can do.
        signals: what the server has said of its own accord and nobody has looked at yet.
    """

    bus: DBusConnection
    guid: str
    owner: str | None = None
    offers: frozenset[str] = field(default_factory=frozenset)
    signals: deque[Message] = field(default_factory=lambda: deque(maxlen=_MOST_SIGNALS))


class Desktop:
    """This user's notification server."""

    def __init__(self, *, name: str = "diskwatch", patience: float = PATIENCE) -> None:
        """Connect to nothing yet.

        Args:
            name: of the program, which servers show beside a notice.
            patience: seconds that the bus and the server get for an answer.
        """
        self._name = name
        self._patience = patience
        self._link: _Link | None = None

    def reach(self) -> None:
        """See whether a server can be reached.

        Raises:
            NoDesktop: it cannot; says why.
        """
        self._asked(self._server)

    def show(
        self, words: Words, *, actions: Sequence[tuple[str, str]] = (), replaces: Bubble | None = None
    ) -> Bubble:
        """Show a notice.

        Args:
            words: what it says.
            actions: what a person may choose, as (key, what it says); left out where the server offers none.
            replaces: the notice in whose place it comes; one that another server showed is left alone.

        Returns:
            Where it is now.

        Raises:
            NoAnswer: it was sent and may be on the screen.
            NoDesktop: it was not shown.
        """

        def ask(link: _Link) -> Bubble:
            place = self._server(link)
            before = replaces.number if replaces is not None and replaces.place == place else 0
            offered = [one for pair in actions for one in pair] if "actions" in link.offers else []
            # What came from a drive must not become a link or a picture where the server reads markup.
            body = html.escape(words.body, quote=False) if "body-markup" in link.offers else words.body
            hints: Mapping[str, tuple[str, object]] = {
                "urgency": ("y", int(words.urgency)),
                "category": ("s", "device"),
                "desktop-entry": ("s", self._name),
            }
            arguments = (
                self._name,
                before,
                "drive-harddisk",
                words.summary,
                body,
                offered,
                hints,
                -1,
            )
            try:
                (number,) = self._call(link, "Notify", "susssasa{sv}i", arguments)
            except TimeoutError as error:
                raise NoAnswer(
                    f"the notification server has a notice and gave no answer in {self._patience:g} seconds"
                ) from error
            return Bubble(place=place, number=int(number))

        return self._asked(ask)

    def fileno(self) -> int | None:
        """What to wait on until a person does something; None while there is no bus."""
        return None if self._link is None else self._link.bus.sock.fileno()

    def chosen(self) -> tuple[Chosen, ...]:
        """What people have chosen since this was last asked; never waits."""
        link = self._link
        if link is None:
            return ()
        try:
            while True:
                link.bus.recv_messages(timeout=0)
        except TimeoutError:
            pass  # all has been read that was there
        except (OSError, ValueError, KeyError):
            self.close()
        found = tuple(_chosen(message, link) for message in link.signals)
        link.signals.clear()
        return tuple(one for one in found if one is not None)

    def close(self) -> None:
        """Let go of the bus; the next call connects anew."""
        if self._link is not None:
            self._link.bus.close()
            self._link = None

    def _asked(self, question: Callable[[_Link], _Answer]) -> _Answer:
        try:
            if self._link is None:
                self._link = self._connected()
            return question(self._link)
        except NoAnswer:
            self.close()
            raise
        except DBusErrorResponse as error:
            # The bus is well: it said that there is no server, or the server said no.
            raise NoDesktop(f"no notification server answers on this session's bus: {_said(error)}") from error
        except TimeoutError as error:
            self.close()
            raise NoDesktop(f"the session bus gave no answer within {self._patience:g} seconds") from error
        except (OSError, ValueError, KeyError, RuntimeError, StopIteration) as error:
            # The library raises all of these for an address or a peer that is no bus.
            self.close()
            raise NoDesktop(f"the session bus cannot be reached: {plain(str(error))}") from error

    def _connected(self) -> _Link:
        bus = open_dbus_connection(_address(), auth_timeout=self._patience)
        link = _Link(bus=bus, guid="")
        try:
            bus.filter(MatchRule(type="signal", interface=_NAME), queue=link.signals)
            (link.guid,) = self._call(link, "GetId", None, (), where=_THE_BUS)
            rule = MatchRule(type="signal", interface=_NAME, member="ActionInvoked")
            unwrap_msg(bus.send_and_get_reply(message_bus.AddMatch(rule), timeout=self._patience))
        except BaseException:
            bus.close()
            raise
        return link

    def _server(self, link: _Link) -> str:
        """Which server there is now, and learn what it offers where it is another than before."""
        owner = self._owner(link)
        if owner is None or owner != link.owner:
            # Asking starts a server that the bus knows how to start.
            (offers,) = self._call(link, "GetCapabilities", None, ())
            link.offers = frozenset(offers)
            link.owner = self._owner(link)
        return f"{link.guid}/{link.owner}"

    def _owner(self, link: _Link) -> str | None:
        try:
            (owner,) = self._call(link, "GetNameOwner", "s", (_NAME,), where=_THE_BUS)
        except DBusErrorResponse:
            return None
        return str(owner)

    def _call(
        self,
        link: _Link,
        method: str,
        signature: str | None,
        arguments: tuple[object, ...],
        *,
        where: DBusAddress = _SERVER,
    ) -> tuple[Any, ...]:
        message = new_method_call(where, method, signature, arguments)
        return tuple(unwrap_msg(link.bus.send_and_get_reply(message, timeout=self._patience)))


def _address() -> str:
    """Where this session's bus is: as the environment says, else where systemd puts it (sd-bus does the same).

    Raises:
        NoDesktop: neither is there.
    """
    named = os.environ.get("DBUS_SESSION_BUS_ADDRESS", "")
    if named:
        return named
    runtime = os.environ.get("XDG_RUNTIME_DIR", "")
    if runtime.startswith("/") and (Path(runtime) / "bus").exists():
        return f"unix:path={runtime}/bus"
    raise NoDesktop(
        "there is no session bus here, so no notice can be shown",
        hint="run this in a desktop session, or with --no-desktop",
    )


def _chosen(message: Message, link: _Link) -> Chosen | None:
    fields = message.header.fields
    if fields.get(HeaderFields.member) != "ActionInvoked" or fields.get(HeaderFields.sender) != link.owner:
        return None
    match message.body:
        case (int(number), str(action)):
            return Chosen(bubble=Bubble(place=f"{link.guid}/{link.owner}", number=number), action=action)
        case _:
            return None


def _said(error: DBusErrorResponse) -> str:
    """What an error reply says, made harmless."""
    words = next((one for one in error.data if isinstance(one, str)), "")
    return plain(f"{error.name}{f': {words}' if words else ''}")
