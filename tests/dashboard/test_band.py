import unicodedata
from dataclasses import replace

import pytest
from hypothesis import given

from diskwatch.dashboard.band import band, is_quiet
from diskwatch.dashboard.weight import Face
from diskwatch.records import DriveLine, LastPass, Outcome
from tests.dashboard.drives import ALL, COPY, KEEP, LOOK, NOW, RETIRE, UNREAD, VIRTUAL
from tests.dashboard.strategies import DRIVE_LINES, TIMES, WIDTHS, unhurried


def plain(line: DriveLine, width: int, face: Face | None = None, *, chosen: bool = False) -> list[str]:
    return [row.plain.rstrip() for row in band(line, NOW, width, face or Face(), chosen=chosen)]


def test_a_grave_drive_takes_three_lines():
    assert plain(RETIRE, 80) == [
        "█  retire   Photos                  /srv/photos                  12 TB  sdb",
        "█  The drive's own self-assessment failed on 28 November.           cause: media",
        "█  reads 12/s 4.2 MB/s 6.2 ms  writes 3/s        margin unknown  read 12 min ago",
    ]


def test_a_narrow_screen_keeps_call_name_reason_and_last_pass():
    assert plain(RETIRE, 40) == [
        "█  retire   Photos             12 TB sdb",
        "█  The drive's own self-assessment…",
        "█  reads 12/s 6.2 ms     read 12 min ago",
    ]


def test_a_wide_screen_shows_more():
    first, second, third = plain(RETIRE, 120)
    assert "Photos (INVENTED RX-12000)" in first
    assert "/srv/photos (7.2 TB used)" in first
    assert "hard disk  12 TB  sdb" in first
    assert second.endswith("cause: media, 92 % likely")
    assert "writes 3/s 90 kB/s 2 ms  busy 0 % of the time" in third


def test_a_very_wide_screen_names_the_bay():
    assert "in pci-0000:00:17.0-ata-3" in plain(RETIRE, 200)[0]


def test_a_quiet_drive_folds_to_one_line_and_its_traffic():
    assert plain(KEEP, 80) == [
        "░  keep     INVENTED NV-2000        /, /home, /boot/efi           2 TB  nvme0n1",
        "░  reads 12/s 4.2 MB/s 6.2 ms  writes 3/s 90 kB/s                read 12 min ago",
    ]


def test_a_quiet_drive_needs_one_line_where_the_screen_is_wide():
    (only,) = plain(KEEP, 160)
    assert only.startswith("░  keep     INVENTED NV-2000")
    assert only.endswith("read 12 minutes ago")
    assert "reads 12/s 4.2 MB/s 6.2 ms" in only


def test_a_virtual_disk_says_that_only_its_traffic_is_watched():
    first, second = plain(VIRTUAL, 80)
    assert first.startswith("░  no SMART INVENTED Virtual")
    assert second.endswith("watched by its traffic alone")


def test_an_unread_drive_is_not_quiet_and_says_why():
    first, second, third = plain(UNREAD, 80)
    assert first.startswith("▒  unread   sde")
    assert "size ?" in first
    assert second == "▒  Reading /dev/sde needs the right to do so."
    assert third.startswith("▒  traffic not measured")
    assert third.endswith("refused 12 min ago")


def test_the_margin_is_named_only_where_something_is_to_be_done():
    named = {line.number: any("margin unknown" in row for row in plain(line, 80)) for line in ALL}
    assert named == {1: True, 2: True, 3: True, 4: False, 5: False, 6: False}


@pytest.mark.parametrize("outcome", list(Outcome))
def test_every_outcome_has_words_beside_its_time(outcome):
    line = replace(COPY, last_pass=LastPass(at=NOW - 720, outcome=outcome, explanation="So it went."))
    assert plain(line, 80)[2].endswith(" 12 min ago")


def test_a_keep_that_could_not_be_read_is_no_longer_quiet():
    failed = LastPass(at=NOW, outcome=Outcome.TIMED_OUT, explanation="It did not answer.")
    asleep = LastPass(at=NOW, outcome=Outcome.ASLEEP, explanation="It sleeps.")
    assert is_quiet(KEEP)
    assert is_quiet(replace(KEEP, last_pass=asleep))
    assert not is_quiet(replace(KEEP, last_pass=failed))
    assert not is_quiet(replace(KEEP, last_pass=None))
    assert not is_quiet(LOOK)


def test_the_chosen_drive_is_marked_by_a_sign_not_by_colour():
    assert plain(COPY, 80, chosen=True)[0].startswith("▓> copy")
    assert plain(COPY, 80, chosen=False)[0].startswith("▓  copy")


def test_the_gravest_word_stands_reversed():
    (title, *_) = band(RETIRE, NOW, 80, Face())
    reversed_ = "".join(
        title.plain[span.start : span.end] for span in title.spans if "reverse" in str(span.style)
    )
    assert reversed_ == " retire "


def test_without_colours_no_colour_is_used():
    for line in ALL:
        for row in band(line, NOW, 80, Face(colours=False)):
            assert not any("#" in str(span.style) for span in row.spans)


def test_where_letters_end_at_ascii_so_does_the_band():
    for line in ALL:
        for width in (40, 80, 120, 200):
            assert all(row.isascii() for row in plain(line, width, Face(ascii_only=True)))


def test_columns_of_all_drives_stand_alike():
    for width in (80, 120, 170):
        starts = {
            plain(line, width)[0].index(known) for line, known in ((RETIRE, "Photos"), (KEEP, "INVENTED"))
        }
        assert len(starts) == 1


def test_wide_letters_are_counted_as_two_columns():
    line = replace(RETIRE, label="日本語のとても長い名前のディスクです")
    for width in (40, 80, 120, 200):
        assert band(line, NOW, width, Face())[0].cell_len <= width


@unhurried
@given(DRIVE_LINES, TIMES, WIDTHS)
def test_any_drive_fits_any_width_without_a_control_character(line, now, width):
    for face in (Face(), Face(ascii_only=True, colours=False)):
        rows = band(line, now, width, face, chosen=True)
        assert 1 <= len(rows) <= 3
        for row in rows:
            assert row.cell_len <= width
            assert not any(unicodedata.category(letter) in {"Cc", "Cs", "Zl", "Zp"} for letter in row.plain)
