import json

from jsonschema import Draft202012Validator

from diskwatch.ticket.schema import NAME, Shape, schema, schema_text


def _pieces(piece, name=""):
    if "$ref" not in piece or "title" in piece:
        yield name, piece
    for key, inner in {**piece.get("properties", {}), **piece.get("$defs", {})}.items():
        yield from _pieces(inner, f"{name}.{key}")
    if "items" in piece:
        yield from _pieces(piece["items"], f"{name}[]")


def test_the_schema_is_one_of_draft_2020_12():
    told = json.loads(schema_text())
    assert told["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    Draft202012Validator.check_schema(told)


def test_every_piece_has_a_title_and_a_description():
    pieces = list(_pieces(schema()))
    assert len(pieces) > 150
    assert [name for name, piece in pieces if not (piece.get("title") and piece.get("description"))] == []


def test_the_schema_carries_its_version():
    assert schema()["properties"]["schema"]["const"] == NAME
    assert NAME.endswith("/1")


def test_it_tells_words_of_the_programs_own_from_those_of_drives_and_people():
    whole = Shape.whole()
    finding = whole.member("findings").item()
    assert finding.member("kind").is_own_word("drift")
    assert finding.member("name").is_own_word("drift:media")
    assert not finding.member("name").is_own_word("a Name that nobody gave $(x)")
    assert not finding.member("sentence").is_own_word("drift")
    assert whole.member("made_at").is_own_word("2026-12-01T12:00:00Z")
    assert not whole.member("weather").described
