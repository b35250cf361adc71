import os
from pathlib import Path

import pytest

from diskwatch import places
from diskwatch.errors import UsageError


@pytest.fixture(autouse=True)
def system(tmp_path, monkeypatch):
    monkeypatch.setattr(places, "SYSTEM_STATE", tmp_path / "system")
    monkeypatch.setattr(places, "SYSTEM_SETTINGS", tmp_path / "etc.toml")
    monkeypatch.setattr(os, "geteuid", lambda: 1000)
    return tmp_path


def test_a_named_folder_and_file_are_taken_as_they_are(tmp_path):
    assert places.state_folder(str(tmp_path / "x")) == tmp_path / "x"
    assert places.settings_file("y.toml") == Path("y.toml")


def test_the_systems_history_is_read_where_there_is_one(system):
    assert places.state_folder(None) == places.user_state()
    (system / "system").mkdir()
    assert places.state_folder(None) == places.user_state()
    (system / "system" / places.HISTORY).touch()
    assert places.state_folder(None) == system / "system"


def test_root_keeps_the_systems_history(system, monkeypatch):
    monkeypatch.setattr(os, "geteuid", lambda: 0)
    assert places.state_folder(None) == system / "system"


def test_xdg_folders_are_followed_and_relative_ones_ignored(monkeypatch, tmp_path):
    """XDG base directory specification: a relative path is invalid and to be ignored."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "states"))
    assert places.user_state() == tmp_path / "states" / "diskwatch"
    monkeypatch.setenv("XDG_STATE_HOME", "states")
    assert places.user_state() == Path.home() / ".local" / "state" / "diskwatch"


def test_the_users_settings_come_before_the_systems(system):
    assert places.settings_file(None) is None
    (system / "etc.toml").touch()
    assert places.settings_file(None) == system / "etc.toml"
    own = Path.home() / ".config" / "diskwatch" / "settings.toml"
    own.parent.mkdir(parents=True)
    own.touch()
    assert places.settings_file(None) == own


def test_live_figures_go_to_memory_first_and_to_the_state_folder_last(monkeypatch, tmp_path):
    monkeypatch.setenv("XDG_RUNTIME_DIR", "/run/user/7")
    folders = places.live_folders(tmp_path)
    assert folders[0] == places.SYSTEM_RUN
    assert folders[1] == Path("/run/user/7/diskwatch")
    assert folders[-1] == tmp_path


def test_root_never_takes_settings_from_a_home_that_may_be_another_users(system, monkeypatch):
    own = Path.home() / ".config" / "diskwatch" / "settings.toml"
    own.parent.mkdir(parents=True)
    own.touch()
    monkeypatch.setattr(os, "geteuid", lambda: 0)
    assert places.settings_file(None) is None
    (system / "etc.toml").touch()
    assert places.settings_file(None) == system / "etc.toml"


def test_a_user_without_a_home_and_an_empty_folder_name_are_wrong_usage(monkeypatch):
    monkeypatch.delenv("HOME")
    monkeypatch.setattr(Path, "home", classmethod(lambda _: (_ for _ in ()).throw(RuntimeError("no home"))))
    with pytest.raises(UsageError, match="no home folder"):
        places.state_folder(None)
    with pytest.raises(UsageError, match="names no folder"):
        places.state_folder("")


def test_what_may_not_be_seen_is_not_there(monkeypatch):
    def refuse(_self, **_options):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "stat", refuse)
    assert not places.is_there(Path("/nowhere/x"))


def test_where_a_history_was_moved_to_is_followed_from_every_default_too(system, tmp_path):
    (system / "system").mkdir()
    new = tmp_path / "new"
    new.mkdir()
    (new / places.HISTORY).touch()
    (system / "system" / places.POINTER).write_text(f"{new}\n")
    assert places.state_folder(None) == new
    assert places.state_folder(str(system / "system")) == new
    (system / "system" / places.HISTORY).touch()
    assert places.state_folder(None) == system / "system", "what lies there goes before any pointer"


def test_a_pointer_that_leads_nowhere_or_in_a_circle_is_left_alone(tmp_path):
    one, two = tmp_path / "one", tmp_path / "two"
    for here, there in ((one, two), (two, one)):
        here.mkdir()
        (here / places.POINTER).write_text(f"{there}\n")
    assert places.state_folder(str(one)) == one
    (two / places.POINTER).unlink()
    assert places.state_folder(str(one)) == one


@pytest.mark.parametrize("odd", [b"", b"relative\n", b"/a\n/b\n", b"/a\0b", b"/" + b"x" * 5000, b"\xff\xfe"])
def test_a_pointer_that_is_no_path_is_none(tmp_path, odd):
    (tmp_path / places.POINTER).write_bytes(odd)
    assert places.moved_to(tmp_path) is None


def test_a_pointer_is_a_plain_file_of_the_right_owner_or_none(tmp_path, monkeypatch):
    target = tmp_path / "target"
    target.write_text("/elsewhere\n")
    pointer = tmp_path / places.POINTER
    pointer.symlink_to(target)
    assert places.moved_to(tmp_path) is None
    pointer.unlink()
    os.mkfifo(pointer)
    assert places.moved_to(tmp_path) is None
    pointer.unlink()
    pointer.write_text("/elsewhere\n")
    owner = pointer.stat().st_uid
    monkeypatch.setattr(os, "geteuid", lambda: owner)
    assert places.moved_to(tmp_path) == Path("/elsewhere")


@pytest.mark.skipif(os.getuid() != 0, reason="needs root to give a file away")
def test_root_is_led_by_nobody_else(tmp_path, monkeypatch):
    pointer = tmp_path / places.POINTER
    pointer.write_text("/elsewhere\n")
    os.chown(pointer, 65534, 65534)
    os.chown(tmp_path, 65534, 65534)
    monkeypatch.setattr(os, "geteuid", lambda: 0)
    assert places.moved_to(tmp_path) is None
    monkeypatch.setattr(os, "geteuid", lambda: 1000)
    assert places.moved_to(tmp_path) == Path("/elsewhere"), "an ordinary user believes the folder's owner"
