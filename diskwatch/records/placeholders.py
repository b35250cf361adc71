"""Names that stand for nothing: what cheap drives and adapters give where a name belongs (practice).

They are kept as they were told, since a person compares them with the label on the drive; but they tell no
drive from another.
"""

import re

_WORDS = re.compile(
    r"none|null|n/?a|unknown|unspecified|invalid|not (?:available|specified|applicable)|default string|"
    r"to be filled by o\.?e\.?m\.?|serial ?(?:number|no\.?)?",
    re.IGNORECASE,
)


def empty_serial(serial: str | None) -> bool:
    """Whether a serial is missing, one letter again and again, made of filling alone, or a word for nothing."""
    text = " ".join((serial or "").split())
    return re.fullmatch(r"|(.)\1+|[0xXfF.\-_ ]+", text) is not None or _WORDS.fullmatch(text) is not None


def empty_wwn(wwn: str | None) -> bool:
    """Whether a world-wide name is missing or made of filling alone, its scheme and authority not counted."""
    digits = re.sub(r"[^0-9a-z]", "", (wwn or "").lower().partition(".")[2])
    # Behind the naming authority's digit, an all-zero name is as empty as one of zeros alone.
    return re.fullmatch(r"[0-9a-f]?0*|f*|x*", digits) is not None
