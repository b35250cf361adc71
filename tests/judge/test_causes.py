import csv
from importlib.resources import files

import pytest
from hypothesis import given, strategies as st

from diskwatch.judge import causes
from diskwatch.records import Cause

SIGNS = sorted(causes.signs())


def test_crc_errors_with_link_resets_and_no_media_trouble_are_the_link():
    """Check value of the method (computed by one route): link .9308, power .0298, controller .0211."""
    found = causes.posterior(
        ["CRC counter", "link reset"], ["media counter", "uncorrectable event", "hot", "unsafe power-off"]
    )
    assert found["link"] == pytest.approx(0.9308, abs=5e-5)
    assert found["power"] == pytest.approx(0.0298, abs=5e-5)
    assert found["controller"] == pytest.approx(0.0211, abs=5e-5)


def test_bad_sectors_that_cannot_be_corrected_and_no_link_trouble_are_the_medium():
    """Check value of the method (computed by one route): media .7567, spare .1165, head .0657."""
    found = causes.posterior(
        ["media counter", "uncorrectable event"], ["CRC counter", "hot", "late probe reads"]
    )
    assert found["media"] == pytest.approx(0.7567, abs=5e-5)
    assert found["spare"] == pytest.approx(0.1165, abs=5e-5)
    assert found["head"] == pytest.approx(0.0657, abs=5e-5)


@given(st.dictionaries(st.sampled_from(SIGNS), st.booleans()))
def test_probabilities_sum_to_one_and_the_order_of_the_signs_does_not_matter(showing):
    shown, absent = [sign for sign in showing if showing[sign]], [sign for sign in showing if not showing[sign]]
    found = causes.posterior(shown, absent)
    assert sum(found.values()) == pytest.approx(1)
    assert causes.posterior(shown[::-1], absent[::-1]) == pytest.approx(found)


def test_a_certain_cause_is_named_alone_and_an_uncertain_one_with_its_runner_up():
    certain = causes.explain(["CRC counter", "link reset"], ["media counter", "uncorrectable event"])
    assert (certain.cause, certain.second) == (Cause.LINK, None)
    either = causes.explain(["worn"], ["media counter", "CRC counter", "hot"])
    assert either.cause is Cause.WEAR_OUT
    alone = causes.explain(["command timeout"], ["media counter", "CRC counter", "hot"])
    assert alone.second is not None or alone.cause is Cause.UNCLEAR


QUIET = [
    "media counter",
    "uncorrectable event",
    "CRC counter",
    "command timeout",
    "hot",
    "slow when hot",
    "vanished without media error",
]
"""Signs that most disks could show and do not."""


def test_reads_that_slow_while_writes_do_not_point_to_a_head_before_any_counter_moves():
    found = causes.explain(["reads slower", "turning platters"], [*QUIET, "writes slower"], drifting=True)
    assert (found.cause, found.second) == (Cause.HEAD, Cause.LOAD)


def test_defects_of_a_disk_whose_reads_slowed_are_the_head_and_without_slow_reads_the_medium():
    defects = ["media counter", "uncorrectable event", "turning platters"]
    quiet = ["CRC counter", "command timeout", "hot", "slow when hot", "writes slower"]
    slowed = causes.explain([*defects, "reads slower"], quiet)
    assert (slowed.cause, slowed.second) == (Cause.HEAD, None)
    assert slowed.probability is not None
    assert slowed.probability >= causes.NAMED
    at_pace = causes.explain(defects, [*quiet, "reads slower"])
    assert (at_pace.cause, at_pace.second) == (Cause.MEDIA, None)


def test_a_drive_without_platters_has_no_head_that_weakens_and_a_turning_one_no_flash_that_wears():
    slow = ["reads slower", "writes slower"]
    flash = causes.posterior([*slow, "no platters"], QUIET)
    disk = causes.posterior([*slow, "turning platters"], QUIET)
    assert flash["head"] < 0.1 * disk["head"]
    assert disk["wear-out"] < 0.2 * flash["wear-out"]


def test_a_drive_on_the_board_that_comes_and_goes_without_any_other_sign_is_its_controller():
    shown = ["vanished without media error", "no cable", "no platters"]
    absent = ["flash media errors", "unsafe power-off", "writes slower", "several drives at once"]
    found = causes.explain(shown, absent, drifting=True)
    assert (found.cause, found.second) == (Cause.CONTROLLER, None)


def test_what_a_sound_drive_explains_best_is_unclear():
    assert causes.explain([], ["media counter", "CRC counter"]).cause is Cause.UNCLEAR


def test_every_cell_has_a_source_and_a_probability_that_leaves_room_for_surprise():
    text = files("diskwatch.judge").joinpath("causes.csv").read_text(encoding="utf-8")
    rows = list(csv.DictReader(text.splitlines()))
    assert len(rows) == 10 * (len(SIGNS) + 1)
    assert all(row["source"] and 0 < float(row["probability"]) < 1 for row in rows)
    assert sum(float(row["probability"]) for row in rows if row["sign"] == "prior") == pytest.approx(1)
