"""What the warnings are worth: measured on recorded drives, plain rules of the trade beside the program's own.

Run with ``pytest -m bench -s tests/judge/test_bench_figures.py``; the tables are printed.
"""

# ruff: noqa: T201  # a benchmark tells what it measured

import random

import pytest

from diskwatch.judge import odds
from diskwatch.replay import replay
from diskwatch.units import DAY
from tests.judge import hazard
from tests.judge.warnings import RULES, Figures, figures, kept_back, measure_of, warned

ALARMS = 0.10
"""Alarms a sound drive-year that are thought bearable."""

SPLITS = 60
GRIDS = {
    "quarters from 4 to 12": [limit / 4 for limit in range(16, 49)],
    "quarters from 5 to 9": [limit / 4 for limit in range(20, 37)],
    "halves from 4 to 12": [limit / 2 for limit in range(8, 25)],
    "whole numbers from 4 to 12": [float(limit) for limit in range(4, 13)],
    "odd numbers from 5 to 11": [5.0, 7.0, 9.0, 11.0],
}
"""Thresholds among which each split may choose: what is found on the rest depends on that, too."""

pytestmark = pytest.mark.bench


@pytest.fixture(scope="module")
def lives():
    folder = hazard.shared_data()
    if folder is None:
        pytest.skip("the recorded drive data are not part of the repository (set DISKWATCH_SHARED)")
    return hazard.lives(folder / hazard.FILE)


def shown(title, rows):
    print(f"\n{title}")
    for name, row in rows:
        print(f"  {name:<34} {row}")


def first_warnings(lives, watch):
    return {serial: day for serial, life in lives.items() if (day := warned(life, watch)) is not None}


def test_the_program_against_plain_rules_in_the_same_run(lives):
    """Chosen on 60 % of the drives, reported on the 40 % that were kept back, and on all.

    The goal on drives that were kept back is at least half of the failing found at no more than 0.10 alarms a
    sound drive-year, nine days ahead. Of 22 failures each is 4.5 points, so that one split decides little; 60
    splits with the threshold chosen anew in each say what to expect of new drives, as a range: over several
    grids of thresholds to choose among, since none of them is the right one.
    """
    parts = {
        "60 %, chosen on": [serial for serial in lives if not kept_back(serial)],
        "40 %, kept back": [serial for serial in lives if kept_back(serial)],
        "all": list(lives),
    }
    told = {name: first_warnings(lives, watch) for name, watch in RULES.items()}
    told["the program (copy or retire)"] = program()
    result: dict[str, dict[str, Figures]] = {}
    for part, serials in parts.items():
        result[part] = {name: figures(lives, by_rule, serials) for name, by_rule in told.items()}
        shown(f"{part}: found, alarms a sound drive-year, median lead", [
            (name, one.row()) for name, one in result[part].items()
        ])  # fmt: skip
    own, every = result["40 %, kept back"], result["all"]["the program (copy or retire)"]
    assert result["all"]["damage measure 7 (copy)"] == every, "the program follows its own rule"
    assert every.share >= 0.5
    assert every.rate <= ALARMS
    assert every.lead is not None
    assert every.lead >= 9
    assert own["the program (copy or retire)"].rate <= ALARMS
    limits = sorted({limit for grid in GRIDS.values() for limit in grid})
    by_limit = {limit: first_warnings(lives, measure_of(limit)) for limit in limits}
    expected = {name: nested(lives, {limit: by_limit[limit] for limit in grid}) for name, grid in GRIDS.items()}
    print(f"\nthreshold chosen anew on 60 % in {SPLITS} splits, reported on the rest")
    for name, (found, rate, lead) in expected.items():
        print(f"  among {name:<27} {found:.1%} found at {rate:.3f} alarms, lead {lead:.1f} d")
    found, rates, leads = zip(*expected.values(), strict=True)
    print(
        f"  range: {min(found):.0%} to {max(found):.0%} found at {min(rates):.3f} to {max(rates):.3f} alarms, "
        f"lead {min(leads):.1f} to {max(leads):.1f} d"
    )
    # Half is reached with some grids and narrowly missed with others: that is what is claimed, and no more.
    assert min(found) >= 0.44
    assert max(found) >= 0.48
    assert max(rates) <= ALARMS
    assert min(leads) >= 9


def program():
    """The day of the first copy or retire that the analyser came to by itself."""
    folder = hazard.shared_data()
    assert folder is not None
    part = replay([folder / hazard.FILE], jobs=2)
    epoch = 719_163  # 1970-01-01 as the calendar counts days
    return {
        drive.serial: drive.warned_at // DAY + epoch for drive in part.drives if drive.warned_at is not None
    }


def nested(lives, told):
    """Mean share found, alarms and lead on the parts kept back, the threshold chosen on the others.

    Args:
        lives: every drive.
        told: the day of each drive's first warning, by threshold.
    """
    chance = random.Random(1)  # noqa: S311 - splits of a benchmark
    serials = sorted(lives)
    shares, rates, leads = [], [], []
    for _ in range(SPLITS):
        chosen = {serial for serial in serials if chance.random() < 0.6}
        tried = {limit: figures(lives, told[limit], chosen) for limit in told}
        bearable = [limit for limit in told if tried[limit].rate <= ALARMS]
        best = max(bearable, key=lambda limit: (tried[limit].share, -limit))
        rest = figures(lives, told[best], [serial for serial in serials if serial not in chosen])
        shares.append(rest.share)
        rates.append(rest.rate)
        leads.append(rest.lead or 0)
    return tuple(sum(values) / SPLITS for values in (shares, rates, leads))


def test_stated_odds_come_true_on_drives_that_they_were_not_worked_out_from(lives):
    """Reliability: worked out on 60 % of the drives, held against the share that failed among the rest."""
    parts = [[life for serial, life in lives.items() if kept_back(serial) is back] for back in (False, True)]
    stated, came = ({row.condition: row for row in hazard.table(part, (30,))} for part in parts)
    rows, held = [], 0
    for condition in (*odds.ORDER, "either-rose", "both-zero", "any"):
        if condition in stated and condition in came:
            one, other = stated[condition], came[condition]
            # Both are estimates: the interval of the difference is what must hold nought.
            inside = one.intervals[2] <= other.intervals[3] and other.intervals[2] <= one.intervals[3]
            held += inside
            rows.append((
                condition,
                (f"stated {one.probability:6.2%} ({one.intervals[0]:.1%}-{one.intervals[1]:.1%})"
                f"  came {other.probability:6.2%} ({other.intervals[0]:.1%}-{other.intervals[1]:.1%})"
                f"  of {other.drives}{'' if inside else '  APART'}"),
            ))  # fmt: skip
    shown("odds within 30 days: stated on 60 %, come on the 40 % kept back (80 % intervals)", rows)
    assert len(rows) >= 6
    assert held == len(rows)


@pytest.mark.parametrize(("name", "at_least"), [("last10days_2019_TOSHIBA_MQ01ABF050.csv.gz", 0.15)])
def test_the_same_rule_on_another_class_of_drives_is_reported_as_it_is(name, at_least):
    """The threshold is high for 2.5-inch drives: nobody is promised there what holds for the others."""
    folder = hazard.shared_data()
    if folder is None:
        pytest.skip("the recorded drive data are not part of the repository (set DISKWATCH_SHARED)")
    part = replay([folder / "drive_series" / name])
    failed = [drive for drive in part.drives if drive.failed]
    found = [drive for drive in failed if drive.warned_at is not None]
    sound = [drive for drive in part.drives if not drive.failed]
    alarms = sum(drive.warned_at is not None for drive in sound)
    print(f"\n{name}: {len(found)} of {len(failed)} found, {alarms} of {len(sound)} sound drives warned of")
    assert len(found) / len(failed) >= at_least


def test_the_split_keeps_two_fifths_back(lives):
    share = sum(map(kept_back, lives)) / len(lives)
    assert 0.38 < share < 0.42
