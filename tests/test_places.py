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
