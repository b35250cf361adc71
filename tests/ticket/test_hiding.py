import json
from dataclasses import replace

import pytest
from hypothesis import HealthCheck, example, given, settings, strategies as st

from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import Entry, Identity, Mount, Place
from diskwatch.ticket import canonical
from diskwatch.ticket.checking import faults
from diskwatch.ticket.document import About, ticket
from diskwatch.ticket.hiding import Hiding
from diskwatch.ticket.names import Hidden, Name
from diskwatch.ticket.page import page
from diskwatch.ticket.schema import Shape, schema
from diskwatch.ticket.writing import text_of
from tests.samples import DAY, HDD, HERE, NOON, read
from tests.ticket.lives import HOST, live, opened

ALL = tuple(Hidden)

# Names that try a searcher: letters with a meaning in patterns, in JSON, in shells, in other alphabets.
letters = st.sampled_from(
    "abcdXYZ0189 .*+?()[]{}|^$\\/\"'`$();<>&%#@!~-_=,:äßÄéñ\u0301ıİŁ日本語кДΣσς😀\u202e\x1b\x07"
)
# Not of digits alone: such a one may be a part of a time, which is no name.
names = st.text(letters, min_size=4, max_size=14).filter(
    lambda one: len(one.strip()) >= 4 and set(one) - set("0123456789 -:./T")
)
clear = (
    st.text(st.sampled_from("ABCDEFGHJK0123456789"), min_size=6, max_size=12)
    .filter(str.isalnum)
    .map("S{}".format)
)


def _hiding(*found):
    return Hiding(
        [
            Name(kind=kind, text=text, alias=f"{kind.value}-{number}")
            for number, (kind, text) in enumerate(found, 1)
        ]
    )


@given(st.lists(names, min_size=1, max_size=4, unique=True), st.lists(names | st.integers(0, 3), max_size=8))
@example(["serial", "serial-1"], [0, 1])
@example(["host-1", "name-1", "[1]"], [0, "host", 1])
@example(["ABC", "ABCDEF", "bcd"], [0, 1, 2])
@example(["l-1x", "seri"], ["serial-1x", 0, 1])
def test_no_name_is_left_whatever_it_is_made_of(found, pieces):
    hiding = _hiding(*((Hidden.SERIAL, name) for name in found))
    words = "".join(piece if isinstance(piece, str) else found[piece % len(found)] for piece in pieces)
    told = hiding.text(words)
    for name in found:
        if len(name.strip()) > 3 or not name.isascii():
            for form in (name, name.lower(), name.upper(), name.strip()):
                assert form not in told


@pytest.mark.parametrize("change", [str.lower, str.upper, str.swapcase, str.title])
def test_a_name_is_found_in_any_case(change):
    assert _hiding((Hidden.SERIAL, "Wd-Ab12cD")).text(f"by-id/ata-{change('Wd-Ab12cD')}-part1") == (
        "by-id/ata-serial-1-part1"
    )


def test_a_name_within_another_one_leaves_nothing_of_it_behind():
    hiding = _hiding((Hidden.PATHS, "/srv"), (Hidden.PATHS, "/srv/photos"), (Hidden.HOST, "photos"))
    assert hiding.text("/srv/photos and /srv and photos") == "paths-2 and paths-1 and host-3"


def test_a_short_name_is_hidden_where_it_stands_as_a_word():
    assert _hiding((Hidden.HOST, "pc")).text("pc, PC: pci-0000") == "host-1, host-1: pci-0000"


@pytest.mark.parametrize(
    "written",
    [
        "naa.5000c500a1b2c3d4",
        "LU WWN Device Id: 5 000c50 0a1b2c3d4",
        "0x5000c500a1b2c3d4",
        "5000C500A1B2C3D4",
        "50:00:c5:00:a1:b2:c3:d4",
        '"wwn": {\n "naa": 5, "oui": 3152, "id": 2712847316\n}',
    ],
)
def test_a_world_wide_name_is_hidden_however_it_is_written(written):
    hiding = Hiding([Name(kind=Hidden.SERIAL, text="naa.5000c500a1b2c3d4", alias="wwn-1", wwn=True)])
    told = hiding.text(written)
    assert "wwn-1" in told
    assert "2712847316" not in told
    assert "a1b2c3d4" not in told.lower().replace(":", "").replace(" ", "")
    if written.startswith('"'):
        assert json.loads("{" + told + "}")["wwn"]["id"] == "wwn-1"


def _history(folder, serial, host, user, mount):
    drive = replace(
        HDD, identity=Identity(wwn="naa.5000c500a1b2c3d4", model="Nordwall", serial=serial, path="/dev/sda")
    )
    place = Place(device="/dev/sda", bay=HERE.bay, lives_here=(Mount(point=mount),))
    raw = (
        f"Serial Number: {serial}\nLU WWN Device Id: 5 000c50 0a1b2c3d4\n"
        f'{{"serial_number": {json.dumps(serial)}, "wwn": {{"naa": 5, "oui": 3152, "id": 2712847316}}}}'
    )
    text = f"{user} on {host} saw {serial} at {mount}/letters; {serial.lower()} {serial.upper()}"
    with History.open(folder) as history:
        live(history, [replace(read(NOON, pending_sectors=0), answer=raw)], drive=drive, place=place)
        history.note(Entry(at=NOON, drive=1, kind="settled", text=text, data={serial: [mount, user]}))
    about = About(at=NOON + DAY, host=replace(HOST, name=host, users=(user,)), hide=ALL)
    with Past.open(folder) as past:
        return ticket(past, past.bays(NOON + DAY), 1, about)


@settings(max_examples=20, deadline=None, suppress_health_check=list(HealthCheck))
@given(serial=names | clear, host=names, user=names, mount=names.map("/{}".format))
@example(serial="INV$1(.*)", host="INV$1", user="nv$1(", mount="/INV$1(.*)/x")
@example(serial='a"b\\c', host="größe", user="GRÖSSE", mount="/größer")
def test_no_hidden_string_survives_anywhere_in_the_file_or_on_the_page(
    tmp_path_factory, serial, host, user, mount
):
    made = _history(tmp_path_factory.mktemp("hidden") / "state", serial, host, user, mount)
    assert not list(faults(json.loads(text_of(made)), schema()))
    assert made["digest"]["sha256"] == canonical.digest(made)
    leaves = list(_texts({key: value for key, value in made.items() if key not in {"digest", "cautions"}}))
    whole = "\n".join(leaves)
    for name in (serial, host, user, mount, "2712847316", "5000c500a1b2c3d4"):
        for form in {name, name.strip(), name.lower(), name.upper()}:
            assert form not in whole
            if form not in text_of({"cautions": made["cautions"]}):
                assert form not in page(made)
    assert [one["kind"] for one in made["hidden"]] == ["serial", "host", "paths"]
    assert made["hidden"][0]["replaced"] >= 3


def _texts(thing):
    if isinstance(thing, str):
        yield thing
    elif isinstance(thing, dict):
        for key, value in thing.items():
            yield key
            yield from _texts(value)
    elif isinstance(thing, list):
        for one in thing:
            yield from _texts(one)


def test_the_same_drive_has_the_same_alias_in_every_ticket(folder):
    one = _history(folder, "INVENTED-77", "attic-box", "marigold", "/srv/photos")
    about = About(at=NOON + 2 * DAY, host=replace(HOST, name="attic-box", users=("marigold",)), hide=ALL)
    with Past.open(folder) as past:
        again = ticket(past, past.bays(NOON + 2 * DAY), 1, about)
    assert one["drive"] == again["drive"]
    assert one["drive"]["serial"] == "serial-1"


def test_words_of_the_programs_own_stay_though_a_person_is_named_like_one():
    hiding = _hiding((Hidden.HOST, "keep"), (Hidden.HOST, "media"))
    told = hiding.document({"call": {"word": "keep", "reason": "keep the media"}}, Shape.whole())
    assert told == {"call": {"word": "keep", "reason": "host-1 the host-2"}}


def test_without_a_name_nothing_is_changed(folder):
    with opened(folder, [read(NOON, pending_sectors=1)]) as past:
        told = ticket(past, past.bays(NOON), 1, About(at=NOON, host=HOST))
    assert told["hidden"] == []
    assert Hiding([]).text("anything") == "anything"
