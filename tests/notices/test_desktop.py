import json
import os
import shutil
import subprocess

import pytest

from diskwatch.notices.desktop import Desktop, NoAnswer, NoDesktop
from diskwatch.notices.wording import Urgency, Words
from tests.notices.bus import ALL, bus_in, needs_bus, server_on, until

WORDS = Words(summary="Look at <b>it</b>", body='A drive named <img src="x"> & more.', urgency=Urgency.CRITICAL)
ACTIONS = (("default", "Show"), ("later", "Put off 7 days"))

needs_screen = pytest.mark.skipif(
    shutil.which("Xvfb") is None or shutil.which("dunst") is None or shutil.which("dunstctl") is None,
    reason="no notification server and no virtual screen are installed here (on Debian: dunst, xvfb)",
)


@pytest.fixture
def bus(tmp_path, monkeypatch):
    with bus_in(tmp_path) as bus:
        monkeypatch.setenv("DBUS_SESSION_BUS_ADDRESS", bus.address)
        yield bus


@pytest.fixture
def desktop():
    made = Desktop(patience=2.0)
    yield made
    made.close()


@needs_bus
def test_a_notice_arrives_with_its_urgency_and_its_actions_and_markup_becomes_text(bus, desktop):
    with server_on(bus, *ALL) as server:
        bubble = desktop.show(WORDS, actions=ACTIONS)
        (shown,) = server.shown()
    assert (shown["app"], shown["summary"], shown["urgency"], shown["type"]) == (
        "diskwatch",
        WORDS.summary,
        2,
        "y",
    )
    assert shown["body"] == 'A drive named &lt;img src="x"&gt; &amp; more.'
    assert shown["actions"] == ["default", "Show", "later", "Put off 7 days"]
    assert (shown["replaces"], shown["number"]) == (0, bubble.number)


@needs_bus
def test_a_server_without_actions_or_markup_gets_neither(bus, desktop):
    with server_on(bus, "body") as server:
        desktop.show(WORDS, actions=ACTIONS)
        (shown,) = server.shown()
    assert (shown["actions"], shown["body"]) == ([], WORDS.body)


@needs_bus
def test_a_notice_takes_the_place_of_its_earlier_one_but_never_of_another_servers(bus, desktop):
    with server_on(bus, *ALL) as server:
        first = desktop.show(WORDS)
        desktop.show(WORDS, replaces=first)
        assert [one["replaces"] for one in server.shown()] == [0, first.number]
    with server_on(bus, *ALL, log="second") as server:
        second = desktop.show(WORDS, replaces=first)
        assert [one["replaces"] for one in server.shown()] == [0]
    assert first.place != second.place


@needs_bus
def test_what_a_person_chooses_is_heard_with_the_notice_that_it_belongs_to(bus, desktop):
    with server_on(bus, *ALL) as server:
        bubble = desktop.show(WORDS, actions=ACTIONS)
        assert desktop.chosen() == ()
        server.say(f"choose {bubble.number} later")
        (one,) = until(desktop.chosen)
        assert (one.bubble, one.action) == (bubble, "later")
        assert desktop.fileno() is not None


@needs_bus
def test_what_is_chosen_while_another_notice_is_shown_is_not_lost(bus, desktop):
    with server_on(bus, *ALL) as server:
        bubble = desktop.show(WORDS, actions=ACTIONS)
        server.say(f"choose {bubble.number} later")
        desktop.show(WORDS)
        assert [one.action for one in desktop.chosen()] == ["later"]


@needs_bus
def test_without_a_server_that_is_said_and_one_that_comes_later_is_found(bus, desktop):
    with pytest.raises(NoDesktop, match="no notification server answers"):
        desktop.show(WORDS)
    with server_on(bus, *ALL) as server:
        desktop.show(WORDS)
        assert len(server.shown()) == 1


@needs_bus
def test_a_server_that_refuses_is_quoted_without_harm(bus, desktop):
    with server_on(bus, *ALL) as server:
        server.say("refuse")
        with pytest.raises(NoDesktop) as caught:
            desktop.show(WORDS)
    assert r"org.example.Refused: not \x1b[31mtoday" in str(caught.value)


@needs_bus
def test_a_server_that_says_nothing_may_have_shown_the_notice(bus):
    hasty = Desktop(patience=0.3)
    with server_on(bus, *ALL) as server:
        hasty.reach()
        server.say("silent")
        with pytest.raises(NoAnswer):
            hasty.show(WORDS)
        assert len(server.shown()) == 1
    hasty.close()


@needs_bus
def test_a_bus_that_goes_and_comes_back_is_found_again(bus, desktop):
    with server_on(bus, *ALL):
        desktop.reach()
    bus.stop()
    with pytest.raises(NoDesktop, match="session bus cannot be reached"):
        desktop.show(WORDS)
    assert desktop.chosen() == ()
    bus.start()
    with server_on(bus, *ALL) as server:
        desktop.show(WORDS)
        assert len(server.shown()) == 1


@pytest.mark.parametrize("address", ["", "nonsense", "tcp:host=x", "unix:path=/no/such/bus", "unix:path"])
def test_an_address_that_is_none_is_one_clear_line(monkeypatch, address, desktop):
    monkeypatch.setenv("DBUS_SESSION_BUS_ADDRESS", address)
    with pytest.raises(NoDesktop) as caught:
        desktop.show(WORDS)
    assert "session bus" in str(caught.value)
    assert "\n" not in str(caught.value)
    assert desktop.fileno() is None


@needs_bus
def test_where_the_environment_is_silent_the_bus_of_the_runtime_folder_is_taken(bus, desktop, monkeypatch):
    monkeypatch.delenv("DBUS_SESSION_BUS_ADDRESS")
    monkeypatch.setenv("XDG_RUNTIME_DIR", str(bus.folder))
    with server_on(bus, *ALL) as server:
        desktop.show(WORDS)
        assert len(server.shown()) == 1


@needs_bus
@needs_screen
@pytest.mark.usefixtures("bus")
def test_a_real_server_on_a_real_screen_shows_it(desktop, tmp_path):
    told = tmp_path / "display"
    with told.open("w") as into:
        screen = subprocess.Popen(
            ["Xvfb", "-displayfd", str(into.fileno()), "-screen", "0", "800x600x24", "-nolisten", "tcp"],
            pass_fds=[into.fileno()],
            stderr=subprocess.DEVNULL,
        )
    server = None
    try:
        display = until(lambda: told.read_text().strip())
        env = {**os.environ, "DISPLAY": f":{display}"}
        server = subprocess.Popen(["dunst"], env=env, stderr=subprocess.DEVNULL)

        def reached():
            try:
                desktop.reach()
            except NoDesktop:
                return False
            return True

        until(reached)
        first = desktop.show(WORDS, actions=ACTIONS)
        again = desktop.show(WORDS, replaces=first)
        assert again == first
        subprocess.run(["dunstctl", "close-all"], env=env, check=True)

        def kept():
            done = subprocess.run(["dunstctl", "history"], env=env, capture_output=True, text=True, check=True)
            return json.loads(done.stdout)["data"][0]

        (shown,) = until(kept)
        assert shown["summary"]["data"] == WORDS.summary
        assert shown["appname"]["data"] == "diskwatch"
        assert shown["category"]["data"] == "device"
    finally:
        for one in (server, screen):
            if one is not None:
                one.terminate()
                one.wait(10)
