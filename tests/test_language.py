"""Texts of the whole house that stand in the marks of gettext, taken out as a translator's tool takes them."""

import ast
import string
from pathlib import Path

import pytest
from babel.messages.extract import extract

import diskwatch
from diskwatch import language

HOUSE = Path(diskwatch.__file__).parent
KEYWORDS = {"_": None, "ngettext": (1, 2), "marked": None, "marked_plural": (1, 2)}

WHOLE = ("ticket/asked.py", "ticket/cautions.py")
"""Files that hold nothing but sentences for a person."""


def extracted(path):
    """(line, text) of every text of a file, each form of a plural by itself."""
    with path.open("rb") as file:
        return [
            (line, text)
            for line, found, _comments, _context in extract("python", file, KEYWORDS)
            for text in ((found,) if isinstance(found, str) else found)
        ]


def fields(text):
    return {field for _, field, _, _ in string.Formatter().parse(text) if field is not None}


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("service/owner.py", "Told by the owner: {what} {value}."),
        ("service/owner.py", "Its call was {before} and is now {now}."),
        (
            "ticket/asked.py",
            "Please replace this drive: it is worn out, and it is to be taken out of service now.",
        ),
        ("ticket/cautions.py", "The call keep is no promise: it says that nothing asks for a deed yet."),
        ("cli/later.py", "become a stronger one, a notice comes at once."),
        ("cli/export_history.py", "the past of {count} drives is in {file}"),
        ("cli/point.py", "{drive} ({device}) stays dark: {why}."),
        ("history/relocation.py", "The history was moved from {source} to {to}: {size}, {count} rows"),
    ],
)
def test_a_translators_tool_finds_the_sentences_of_every_room(name, text):
    assert any(text in found for _, found in extracted(HOUSE / name))


@pytest.mark.parametrize("path", sorted(HOUSE.rglob("*.py")), ids=lambda path: str(path.relative_to(HOUSE)))
def test_fields_of_marked_texts_have_names_so_that_a_translation_may_order_them(path):
    for line, text in extracted(path):
        assert all(field.isidentifier() for field in fields(text)), (line, text)


@pytest.mark.parametrize("name", WHOLE)
def test_no_sentence_stands_outside_the_marks(name):
    tree = ast.parse((HOUSE / name).read_text(encoding="utf-8"))
    inside = {
        id(part)
        for node in ast.walk(tree)
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in KEYWORDS
        for part in ast.walk(node)
    }
    documentation = {id(node.value) for node in ast.walk(tree) if isinstance(node, ast.Expr)}
    loose = [
        node.value
        for node in ast.walk(tree)
        if isinstance(node, ast.Constant)
        and isinstance(node.value, str)
        and " " in node.value
        and id(node) not in inside | documentation
    ]
    assert not loose


def test_a_text_in_an_f_string_is_not_found_so_that_none_may_stand_in_one():
    for path in sorted(HOUSE.rglob("*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in KEYWORDS:
                assert not any(isinstance(one, ast.JoinedStr) for one in node.args), (path, node.lineno)


def test_the_singular_is_for_one_alone():
    assert [language.ngettext("one", "many", count) for count in (0, 1, 2)] == ["many", "one", "many"]
