"""Every text of the judgement, taken out of the code as a translator's tool takes it."""

import ast
import re
import string
from pathlib import Path

import pytest
from babel.messages.extract import extract

import diskwatch.judge
from diskwatch.judge import language

ROOM = Path(diskwatch.judge.__file__).parent
KEYWORDS = {"_": None, "ngettext": (1, 2), "marked": None, "marked_plural": (1, 2)}

PROMISES = frozenset(
    {
        *(
            "safe",
            "safely",
            "safety",
            "healthy",
            "health",
            "fine",
            "good",
            "guarantee",
            "guaranteed",
            "reliable",
        ),
        *(
            "reliably",
            "ok",
            "okay",
            "sound",
            "secure",
            "trust",
            "trustworthy",
            "perfect",
            "certain",
            "harmless",
        ),
    }
)
"""Words that promise; "unsafe power-offs" is the trade's own term and is read as another word."""


def extracted():
    """(file, line, text) of every text, each form of a plural by itself."""
    for path in sorted(ROOM.glob("*.py")):
        with path.open("rb") as file:
            for line, found, _comments, _context in extract("python", file, KEYWORDS):
                for text in (found,) if isinstance(found, str) else found:
                    yield path.name, line, text


TEXTS = tuple(extracted())


def words(text):
    return set(re.findall(r"[a-z]+", text.casefold().replace("unsafe power-offs", "")))


def test_the_extractor_finds_the_texts_of_every_file_that_speaks():
    files = {name for name, _, _ in TEXTS}
    assert {"sentences.py", "changes.py", "names.py", "odds_told.py", "facts.py"} <= files
    assert len(TEXTS) > 100


@pytest.mark.parametrize("name", sorted({name for name, _, _ in TEXTS}))
def test_no_sentence_says_or_implies_that_a_drive_is_safe(name):
    said = {(line, word) for file, line, text in TEXTS if file == name for word in words(text) & PROMISES}
    assert not said


def test_the_reader_of_the_texts_notices_a_promise():
    assert words("The drive is healthy.") & PROMISES
    assert not words("unsafe power-offs") & PROMISES


def test_fields_of_texts_have_names_so_that_a_translation_may_order_them():
    for name, line, text in TEXTS:
        fields = [field for _, field, _, _ in string.Formatter().parse(text) if field is not None]
        assert all(field.isidentifier() for field in fields), (name, line)


def test_both_forms_of_a_plural_have_the_same_fields():
    for path in sorted(ROOM.glob("*.py")):
        with path.open("rb") as file:
            for line, found, _comments, _context in extract("python", file, {"ngettext": (1, 2)}):
                one, many = (
                    {field for _, field, _, _ in string.Formatter().parse(text) if field} for text in found
                )
                assert one == many, (path.name, line)


@pytest.mark.parametrize(
    "name", ["sentences.py", "changes.py", "odds_told.py", "margin_told.py", "outlook_told.py", "rulebook.py"]
)
def test_no_text_with_words_stands_outside_the_marks(name):
    tree = ast.parse((ROOM / name).read_text(encoding="utf-8"))
    inside = {
        id(part)
        for node in ast.walk(tree)
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in KEYWORDS
        for part in ast.walk(node)
    }
    documentation = {
        id(node.value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Expr) and isinstance(node.value, ast.Constant)
    }
    loose = [
        (node.lineno, node.value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Constant)
        and isinstance(node.value, str)
        and " " in node.value.strip()
        and id(node) not in inside | documentation
    ]
    assert not loose


def test_the_singular_is_for_one_alone():
    assert [language.ngettext("one", "many", count) for count in (0, 1, 2)] == ["many", "one", "many"]


def test_marks_change_nothing():
    assert language._("text") == language.marked("text") == "text"
    assert language.marked_plural("one", "many") == ("one", "many")
