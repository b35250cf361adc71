import unicodedata
from dataclasses import replace

from hypothesis import given

from diskwatch.dashboard.unfold import unfolded
from diskwatch.dashboard.weight import Face
from diskwatch.records import CallWord, DriveLine, LastPass, Outcome
from tests.dashboard.drives import COPY, KEEP, NOW, RETIRE, UNREAD, called
from tests.dashboard.strategies import DRIVE_LINES, TIMES, WIDTHS, unhurried


def whole(line: DriveLine, width: int = 80) -> str:
    """All that is told, in one text, without the bar and the line breaks."""
    return " ".join(" ".join(row.plain[1:].split()) for row in unfolded(line, NOW, width, Face()))


def test_a_reason_that_the_band_had_to_cut_is_told_whole():
    long = (
        "Pending sectors rose from 0 to 24 in 9 powered days, after three years in which none was seen at all."
    )
    line = replace(COPY, call=called(CallWord.COPY, long))
    assert f"Why: {long}" in whole(line)


def test_a_reason_that_stands_above_is_not_told_again():
    assert "Why:" not in whole(COPY)


def test_a_folded_drive_tells_its_reason():
    assert "Why: No signal moved beyond its norm." in whole(KEEP)


def test_the_call_is_told_with_its_age_rule_and_cause():
    assert "Called retire since Saturday by the rule invented-rule. Cause: media, 92 % likely." in whole(RETIRE)


def test_every_finding_is_told_with_its_evidence_or_as_a_fact():
    told = whole(COPY)
    assert (
        "Finding drift:media: The above (since Saturday; "
        "a drive within the norm would show this at most once in 10 years)" in told
    )
    assert "An extended self-test could not read block 88,211,004. (since 22 October 2026; a fact" in told


def test_who_the_drive_is_stands_in_full():
    told = whole(RETIRE)
    for known in ("INV0001", "naa.5000c500a0000001", "INVENTED RX-12000", "/dev/sdb", "pci-0000:00:17.0-ata-3"):
        assert known in told
    assert "Holds /srv/photos: 7.2 TB of 12 TB in use." in told


def test_what_is_not_known_is_said_to_be_unknown():
    told = whole(UNREAD)
    for unknown in ("model not known", "serial not known", "WWN not known", "bay not known"):
        assert unknown in told
    assert "Only its path tells it from other drives." in told
    assert "Holds /home; how much is in use there is not known." in whole(KEEP)


def test_why_the_last_pass_failed_is_told_below_a_standing_call():
    failed = LastPass(
        at=NOW - 720, outcome=Outcome.TIMED_OUT, explanation="It did not answer within 60 seconds."
    )
    assert "12 minutes ago: timed-out. It did not answer within 60 seconds." in whole(
        replace(COPY, last_pass=failed)
    )


def test_a_drive_never_asked_says_since_when_it_is_known():
    assert "Never asked; first seen 2026-09-02" in whole(replace(UNREAD, last_pass=None))


@unhurried
@given(DRIVE_LINES, TIMES, WIDTHS)
def test_any_drive_unfolds_within_any_width_without_a_control_character(line, now, width):
    for row in unfolded(line, now, width, Face()):
        assert row.cell_len <= width
        assert not any(unicodedata.category(letter) in {"Cc", "Cs", "Zl", "Zp"} for letter in row.plain)
