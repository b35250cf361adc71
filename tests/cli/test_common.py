import json

from diskwatch.cli.common import print_json


def test_large_integers_become_strings_at_any_depth_and_small_ones_stay(capsys):
    print_json({"a": [2**53, 2**53 + 1, {"b": -(2**64)}], "c": True, "d": 1.5, "e": None})
    answer = json.loads(capsys.readouterr().out)
    assert answer == {"a": [2**53, str(2**53 + 1), {"b": str(-(2**64))}], "c": True, "d": 1.5, "e": None}
