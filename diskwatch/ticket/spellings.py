"""The ways in which one name may be written in a ticket: escaped, spaced, in another case or form. Pure."""

import json
import re
import unicodedata
from collections.abc import Iterator

from diskwatch.units import plain

_WORD = 3
"""Letters up to which a plain name is hidden only where it stands as a word: "pc" is a host's name, and part of
every PCI address."""


def patterns(name: str, *, wwn: bool) -> Iterator[str]:
    """Regular expressions, without groups, that find a name; to be used without regard to case."""
    if wwn:
        yield from _world_wide(name)
    for spelling in sorted(_spellings(name), key=lambda one: (-len(one), one)):
        found = re.escape(spelling)
        if len(spelling) <= _WORD and spelling.isascii() and spelling.isalnum():
            found = rf"(?<![^\W_]){found}(?![^\W_])"
        yield found


def _spellings(name: str) -> set[str]:
    forms = {name, name.strip(), plain(name), name.encode("utf-8", "backslashreplace").decode("utf-8")}
    # As udev writes names into links, and mount tables their blanks.
    forms |= {name.replace(" ", "_"), name.replace(" ", "\\x20"), name.replace(" ", "\\040")}
    forms |= {unicodedata.normalize(form, one) for form in ("NFC", "NFD", "NFKC", "NFKD") for one in set(forms)}
    forms |= {change(one) for change in (str.lower, str.upper, str.casefold) for one in set(forms)}
    forms |= {json.dumps(one, ensure_ascii=ascii_)[1:-1] for ascii_ in (True, False) for one in set(forms)}
    forms |= {plain(one) for one in set(forms)}
    return {one for one in forms if one.strip()}


def _world_wide(name: str) -> Iterator[str]:
    """Its digits however they are set apart, and the numbers that smartctl's document has of it."""
    digits = re.sub(r"[^0-9a-f]", "", name.partition(".")[2].lower())
    if len(digits) < 8:
        return
    yield r"[\s:._-]{0,2}".join(digits)
    numbers = {int(digits, 16)}
    if len(digits) >= 16:
        # NAA 5: a digit of authority, six of the maker, nine of the drive; EUI-64: six and ten.
        numbers |= {int(digits[7:16], 16), int(digits[6:16], 16)}
    for number in sorted(numbers, reverse=True):
        if number > 99_999:
            yield rf"(?<![0-9]){number}(?![0-9])"
