import re

import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import UsageError
from diskwatch.records.owner import LONGEST, OwnerFacts, checked_fact, checked_text, owner_facts
from diskwatch.units import is_active

NOON = 1_796_126_400  # 2026-12-01T12:00:00Z


def test_facts_come_back_and_what_was_taken_back_is_not_known():
    kept = {
        "label": ("left bay", 1),
        "asset": ("A-17", 2),
        "warranty-until": ("2027-05-31", 3),
        "backed-up": ("", 4),
        "replaced-by": ("INVENTED-2", 5),
    }
    assert owner_facts(kept) == OwnerFacts(
        asset="A-17", warranty_until="2027-05-31", replaced_by="INVENTED-2", replaced_at=5
    )
    assert owner_facts({"replaced-by": ("", 5)}) == OwnerFacts()


@pytest.mark.parametrize(
    "day",
    [
        "2026-02-29",
        "2026-13-01",
        "2026-00-10",
        "20261201",
        "2026-W05-1",
        "1.12.2026",
        "soon",
        "٢٠٢٦-١٢-٠١",
        "\x1b[1m",
    ],
)
def test_a_day_that_does_not_exist_is_refused_and_shown_harmless(day):
    for name in ("warranty-until", "backed-up"):
        with pytest.raises(UsageError, match="is no day of the calendar") as told:
            checked_fact(name, day, NOON)
        assert "\x1b" not in str(told.value)


def test_a_backup_to_come_is_refused_and_a_warranty_to_come_is_not():
    assert checked_fact("backed-up", "2026-12-02", NOON) == "2026-12-02", "it is that day in the east already"
    with pytest.raises(UsageError, match="has not come yet"):
        checked_fact("backed-up", "2026-12-03", NOON)
    assert checked_fact("warranty-until", " 2031-01-01 ", NOON) == "2031-01-01"


def test_empty_words_take_a_fact_back():
    assert {checked_fact(name, "  ", NOON) for name in ("label", "asset", "warranty-until", "backed-up")} == {
        ""
    }


def test_a_fact_that_nobody_knows_is_refused_by_name():
    with pytest.raises(UsageError, match="no owner's fact colour"):
        checked_fact("colour", "blue", NOON)
    with pytest.raises(UsageError):
        checked_fact("replaced-by", "X", NOON)


@given(text=st.text(max_size=200))
def test_words_are_kept_to_the_letter_or_refused_and_never_altered(text):
    try:
        kept = checked_text("--label", text, LONGEST)
    except UsageError:
        words = text.strip()
        assert len(words) > LONGEST or any(is_active(one) or one in "\t\n\r" for one in words)
    else:
        assert kept == text.strip()
        assert not re.search(r"[\x00-\x1f\x7f-\x9f]", kept)


def test_a_megabyte_is_refused_in_one_short_line():
    with pytest.raises(UsageError) as told:
        checked_fact("label", "x" * 1_000_000, NOON)
    assert "1,000,000 letters" in str(told.value)
    assert len(str(told.value)) < 100
