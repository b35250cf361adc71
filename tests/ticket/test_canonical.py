import json
import math
import struct

import pytest
import rfc8785
from hypothesis import given, strategies as st

from diskwatch.ticket import canonical

EXACT = canonical.EXACT
numbers = st.floats(allow_nan=False, allow_infinity=False)
texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=20)
values = st.recursive(
    st.none() | st.booleans() | st.integers(-EXACT + 1, EXACT - 1) | numbers | texts,
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(texts, inner, max_size=4),
    max_leaves=20,
)


@given(values)
def test_it_writes_what_the_independent_writer_writes(thing):
    assert canonical.written(thing) == rfc8785.dumps(thing)


@given(st.integers(0, 2**64 - 1))
def test_every_number_is_written_as_the_independent_writer_writes_it(bits):
    (number,) = struct.unpack(">d", struct.pack(">Q", bits))
    if math.isfinite(number):
        assert canonical.written(number) == rfc8785.dumps(number)
        assert float(canonical.number(number)) == number


@pytest.mark.parametrize(
    ("number", "told"),
    [
        # RFC 8785, appendix B.
        (5e-324, "5e-324"),
        (1.7976931348623157e308, "1.7976931348623157e+308"),
        (295147905179352830000.0, "295147905179352830000"),
        (1e21, "1e+21"),
        (9.999999999999997e22, "9.999999999999997e+22"),
        (333333333.3333333, "333333333.3333333"),
        (0.000001, "0.000001"),
        (1e-7, "1e-7"),
        (-0.0, "0"),
        (-0.0000033333333333333333, "-0.0000033333333333333333"),
        (1424953923781206.2, "1424953923781206.2"),
    ],
)
def test_numbers_are_written_as_the_standard_shows_them(number, told):
    assert canonical.number(number) == told


@pytest.mark.parametrize("thing", [math.nan, math.inf, 2**53 + 1, "\ud800", {1: 2}, {"a": {1, 2}}])
def test_what_the_standard_cannot_write_is_refused(thing):
    with pytest.raises(ValueError, match=r"."):
        canonical.written(thing)


anything = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(st.characters()),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(st.characters()), inner, max_size=4),
    max_leaves=20,
)


@given(anything)
def test_whatever_is_made_storable_can_be_written_and_read_back(thing):
    stored = canonical.storable(thing)
    assert json.loads(json.dumps(stored, allow_nan=False)) == stored
    assert canonical.written(stored)


def test_a_whole_number_that_readers_may_not_hold_becomes_a_string():
    assert canonical.storable([EXACT, EXACT + 1, -EXACT - 1]) == [EXACT, str(EXACT + 1), str(-EXACT - 1)]


def test_the_digest_is_of_all_but_itself():
    document = {"b": 1, "a": [True, None]}
    digest = canonical.digest(document)
    assert digest == canonical.digest({**document, "digest": {"sha256": digest}})
    assert digest != canonical.digest({**document, "b": 2})
    # echo -n '{"a":[true,null],"b":1}' | sha256sum
    assert digest == "51705a2c9eb3e7e410a58f696a770c3ac3885a0cf43eb7fc88f5e47c11d4d30d"
