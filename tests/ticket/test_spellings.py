import json
import re
import unicodedata

import pytest

from diskwatch.ticket.spellings import patterns
from diskwatch.units import plain


def _finds(name, words, *, wwn=False):
    return any(re.search(one, words, re.IGNORECASE) for one in patterns(name, wwn=wwn))


@pytest.mark.parametrize(
    "written",
    [
        lambda name: name,
        lambda name: name.strip(),
        json.dumps,
        lambda name: json.dumps(name, ensure_ascii=False),
        plain,
        lambda name: json.dumps(plain(name)),
        lambda name: unicodedata.normalize("NFD", name),
        lambda name: name.replace(" ", "_"),
        lambda name: name.replace(" ", "\\x20"),
        str.upper,
        str.casefold,
    ],
)
def test_a_name_is_found_as_it_may_be_written(written):
    name = ' Größe "7"\t.*é'
    assert _finds(name, f"before{written(name)}after")


def test_signs_of_patterns_mean_themselves():
    assert not _finds("a.*b1", "a--b1")
    assert _finds("a.*b1", "xa.*b1x")


def test_a_short_plain_name_is_no_part_of_a_word():
    assert not _finds("pc", "pci")
    assert _finds("pc", "on pc.")
    assert _finds("日", "x日x")


def test_a_name_without_enough_digits_is_no_world_wide_one():
    assert not _finds("naa.5", "5", wwn=False) or _finds("naa.5", "naa.5", wwn=True)
    assert not _finds("eui.0025385b71b0a1c2", "0025 385b", wwn=True)
    assert _finds("eui.0025385b71b0a1c2", "IEEE EUI-64: 002538 5b71b0a1c2", wwn=True)
    assert _finds("eui.0025385b71b0a1c2", f'"ext_id": {0x5B71B0A1C2}', wwn=True)
