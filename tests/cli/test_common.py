import io
import json
import sys

from diskwatch import units
from diskwatch.cli.common import Bar, print_json


def test_large_integers_become_strings_at_any_depth_and_small_ones_stay(capsys):
    print_json({"a": [2**53, 2**53 + 1, {"b": -(2**64)}], "c": True, "d": 1.5, "e": None})
    answer = json.loads(capsys.readouterr().out)
    assert answer == {"a": [2**53, str(2**53 + 1), {"b": str(-(2**64))}], "c": True, "d": 1.5, "e": None}


def test_a_bar_is_shown_on_a_terminal_only_and_leaves_nothing_behind(monkeypatch):
    written = io.StringIO()
    monkeypatch.setattr(sys, "stderr", written)
    with Bar("replaying") as bar:
        bar.show(1, 2)
    assert written.getvalue() == ""
    monkeypatch.setattr(written, "isatty", lambda: True, raising=False)
    with Bar("replaying") as bar:
        bar.show(1, 2)
        bar.show(0, 0)
    assert "50%" in written.getvalue()
    assert written.getvalue().endswith("\r")


def test_letters_that_a_terminal_acts_on_are_escaped_as_json_has_it(capsys):
    print_json({"mount": "/srv/\u009b31m\u202egnp", "text": "\x1b[2J\n"})
    out = capsys.readouterr().out
    assert not any(units.is_active(letter) for letter in out)
    assert json.loads(out) == {"mount": "/srv/\u009b31m\u202egnp", "text": "\x1b[2J\n"}
