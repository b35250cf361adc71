from dataclasses import astuple

from hypothesis import given, strategies as st

from diskwatch.machine.stat import Stat, parse, stat_of
from tests.machine.trees import Tree

SEVENTEEN = "101 2 303 4 105 6 707 8 9 10 11 112 13 214 15 116 17"


def test_fields_are_taken_by_their_place_and_sectors_are_512_bytes():
    assert parse(SEVENTEEN) == Stat(
        in_flight=9, discards=112, discard_bytes=214 * 512, discard_ms=15, flushes=116, flush_ms=17
    )


def test_what_an_older_kernel_does_not_count_is_not_known():
    words = SEVENTEEN.split()
    before_4_18, before_5_5 = " ".join(words[:11]), " ".join(words[:15])
    assert parse(before_4_18) == Stat(in_flight=9)
    assert parse(before_5_5) == Stat(in_flight=9, discards=112, discard_bytes=214 * 512, discard_ms=15)


def test_fields_of_a_kernel_to_come_do_no_harm():
    assert parse(f"{SEVENTEEN} 18 19") == parse(SEVENTEEN)


@given(st.text(alphabet="0123456789 -x\n\u0663", max_size=120))
def test_a_text_of_any_sort_gives_whole_numbers_or_nothing(text: str):
    found = parse(text)
    assert found is None or all(number is None or number >= 0 for number in astuple(found))


def test_a_disk_that_the_kernel_does_not_count_is_not_known_instead_of_idle(tree: Tree):
    place = tree.sata(files={"stat": SEVENTEEN})
    assert stat_of(tree.sys, "sda") == parse(SEVENTEEN)
    tree.put(place / "queue/iostats", "0")
    assert stat_of(tree.sys, "sda") is None
    assert stat_of(tree.sys, "sdz") is None
