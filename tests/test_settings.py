import os
import re
from pathlib import Path

import msgspec
import pytest

from diskwatch import settings
from diskwatch.errors import SettingsError

EXAMPLE = Path(settings.__file__).with_name("example.toml")


def load(tmp_path, text):
    path = tmp_path / "settings.toml"
    path.write_text(text, encoding="utf-8")
    return settings.load(path)


def refused(tmp_path, text):
    with pytest.raises(SettingsError) as caught:
        load(tmp_path, text)
    assert "settings.toml" in str(caught.value)
    return str(caught.value)


def test_the_example_holds_every_key_with_its_default():
    assert settings.load(EXAMPLE) == settings.Settings()
    text = EXAMPLE.read_text(encoding="utf-8")
    tables = dict(re.findall(r"^\[(\w+)\](.*?)(?=^\[|\Z)", text, re.MULTILINE | re.DOTALL))
    wanted = {field.name: field.type for field in msgspec.structs.fields(settings.Settings)}
    assert set(tables) == set(wanted)
    for name, table in wanted.items():
        keys = set(re.findall(r"^#? ?(\w+) =", tables[name], re.MULTILINE))
        assert keys == {field.name for field in msgspec.structs.fields(table)}, name


def test_without_a_file_the_defaults_hold():
    found = settings.load(None)
    assert (found.smart.every, found.io.every, found.smart.timeout) == (1800, 10, 60)


def test_durations_come_out_in_seconds(tmp_path):
    found = load(tmp_path, '[smart]\nevery = "2h"\n[selftest]\nshort = "30d"\n')
    assert (found.smart.every, found.selftest.short, found.selftest.long) == (7200, 2_592_000, None)


MISTAKES = {
    '[smart]\nevry = "30m"': "[smart] evry: no such key; did you mean every?",
    '[smar]\nevery = "30m"': "smar: no such table or key; did you mean smart?",
    '[smart]\nbackup = "weekly"': "[smart] backup: no such key; did you mean [history] backup?",
    "[io]\nzzz = 1": "[io] zzz: no such key; known are: every",
    '[smart]\nevery = "0s"': "expected a duration such as 1s, 30m, 2h or 7d, at least 1s, not '0s'",
    "[smart]\nevery = 30": "[smart] every: expected a duration such as 1s, 30m, 2h or 7d, not 30",
    '[watch]\nonly = "sda"': "[watch] only: expected a list, got a string",
    "[watch]\nonly = [1]": "[watch] only: expected a string, got a whole number",
    '[history]\nbackup = "hourly"': "[history] backup: expected one of daily, never, weekly, not 'hourly'",
    '[probe]\nenabled = "yes"': "[probe] enabled: expected true or false, got a string",
    '[notices]\nquiet = "9-7"': "[notices] quiet: expected hours such as 22:00-07:00, or nothing, not '9-7'",
    "smart = 3": "[smart]: expected a table, got a whole number",
    '[smart]\ncommand = ""': "[smart] command: expected a string of length >= 1",
}


@pytest.mark.parametrize(("text", "told"), MISTAKES.items())
def test_a_mistake_is_told_by_file_key_and_expectation_in_one_line(tmp_path, text, told):
    message = refused(tmp_path, text)
    assert message.endswith(told), message
    assert "\n" not in message


def test_what_is_no_toml_and_what_is_not_there_are_told(tmp_path):
    assert "is no TOML" in refused(tmp_path, "smart = [")
    with pytest.raises(SettingsError, match="cannot be read: No such file"):
        settings.load(tmp_path / "none.toml")
    (tmp_path / "settings.toml").write_bytes(b"\xff\xfe")
    with pytest.raises(SettingsError, match="is no TOML"):
        settings.load(tmp_path / "settings.toml")


@pytest.mark.parametrize(
    "text",
    ["a = " + "[" * 50_000, "[smart]\nevery = " + "9" * 6_000, '[smart]\nevery = "999999999d"'],
    ids=["deep", "long", "far"],
)
def test_nonsense_of_any_size_is_told_in_one_line(tmp_path, text):
    assert len(refused(tmp_path, text)) < 400


def test_a_folder_or_a_pipe_is_no_settings_file(tmp_path):
    os.mkfifo(tmp_path / "pipe")
    for path in (tmp_path, tmp_path / "pipe"):
        with pytest.raises(SettingsError, match="is no file"):
            settings.load(path)
