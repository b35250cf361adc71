"""How often a named cause is the right one, and an outlook comes true, on rehearsals of every scenario.

Run with ``pytest -m bench -s tests/judge/test_bench_causes.py``. DISKWATCH_SEEDS says how many seeds each
scenario is lived with (20); ten scenarios and twenty seeds are two hundred rehearsals.
"""
# ruff: noqa: T201  # a benchmark tells what it measured

import os
from collections import Counter, defaultdict

import pytest

from diskwatch import analyser
from diskwatch.judge.causes import NAMED
from diskwatch.judge.outlook import outlook
from diskwatch.records import Cause, IoSpan
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course
from diskwatch.service.asking import InTurn
from diskwatch.service.keeper import Keeper
from diskwatch.service.rounds import Rounds
from diskwatch.service.traffic import Traffic
from diskwatch.units import day_number

SEEDS = int(os.environ.get("DISKWATCH_SEEDS", "20"))
ASKED_AT = 0.5
"""Part of a scenario after which its outlook for the rest is taken."""

LONG = frozenset({"two-quiet-years"})
"""Scenarios that take minutes each and name no cause."""

BANDS = ((0.0, 0.1), (0.1, 0.2), (0.2, 0.4), (0.4, 0.7), (0.7, 1.01))


class Lived:
    """One rehearsal: what was said of each drive, and its states half way and at the end."""

    def __init__(self, name, seed, folder):
        self.scenario = scenarios.load(name)
        course = Course(self.scenario, seed=seed)
        self.states: dict[str | None, str] = {}
        self.half: dict[str | None, str] = {}
        self.half_day = 0
        keeper = Keeper(folder)
        rounds = Rounds(course.machine, keeper, course.clock.now, asking=InTurn)
        traffic = Traffic(course.machine, course.clock.now, course.clock.steady)
        gathered: list[IoSpan] = []

        def ask():
            keeper.add_traffic(gathered)
            gathered.clear()
            done = rounds.run()
            for one in done:
                if one.state is not None:
                    self.states[one.known.drive.identity.serial] = one.state
            return done

        def count():
            gathered.extend(traffic.look(dict(rounds.blocks)).spans)

        for days in course.run(ask, count):
            if not self.half and days >= course.days * ASKED_AT:
                self.half, self.half_day = dict(self.states), day_number(course.clock.now())
        keeper.close()
        self.end_day = day_number(course.clock.now())
        self.stories = course.ended().stories


@pytest.fixture(scope="module")
def every(tmp_path_factory):
    names = sorted(set(scenarios.names()) - LONG)
    return [
        (name, seed, Lived(name, seed, tmp_path_factory.mktemp(f"{name}-{seed}")))
        for name in names
        for seed in range(1, SEEDS + 1)
    ]


def truths(scenario):
    """The cause that a scenario names for a drive."""
    return {wish.drive: wish.cause for wish in scenario.expect if wish.drive and wish.cause is not None}


@pytest.mark.bench
def test_a_named_cause_is_the_right_one_in_nine_of_ten_cases(every):
    named: defaultdict[str, Counter[str]] = defaultdict(Counter)
    right = total = 0
    for name, _seed, lived in every:
        for serial, cause in truths(lived.scenario).items():
            said = [
                one.call
                for one in lived.stories[serial].said
                if one.call.cause not in {None, Cause.UNCLEAR}
                and (one.call.cause_probability is None or one.call.cause_probability >= NAMED)
            ]
            if not said:
                named[name]["never named alone"] += 1
                continue
            last = said[-1].cause
            total += 1
            right += last is cause
            named[name][f"{last} ({'right' if last is cause else f'it was {cause}'})"] += 1
    print(f"\ncause last named alone, {SEEDS} seeds a scenario")
    for name, counts in named.items():
        told = ", ".join(f"{what} {count}" for what, count in counts.most_common())
        print(f"  {name:<26} {told}")
    print(f"  right when named: {right} of {total} = {right / total:.1%}")
    assert right / total >= 0.9


@pytest.mark.bench
def test_no_scenario_is_blamed_on_what_it_forbids(every):
    broken = [
        (name, seed, serial)
        for name, seed, lived in every
        for serial, story in lived.stories.items()
        for wish in lived.scenario.expect
        if wish.drive == serial and any(one.call.cause in wish.never_cause for one in story.said)
    ]
    print(f"\nblamed on a forbidden cause: {broken or 'never'}")
    assert not broken


@pytest.mark.bench
def test_an_outlook_taken_half_way_comes_true_as_often_as_it_says(every):
    """Chances of a fresh occasion in the second half, by what was said, against how often one came."""
    came: defaultdict[tuple[float, float], list[tuple[float, bool]]] = defaultdict(list)
    for _name, _seed, lived in every:
        for serial, text in lived.half.items():
            before, after = analyser.load(text), analyser.load(lived.states[serial])
            if before.first_at is None:
                continue
            ahead = outlook(
                before.streams,
                before.standing,
                (),
                first_day=day_number(before.first_at),
                day=lived.half_day,
                days=lived.end_day - lived.half_day,
            )
            for one in ahead.fresh:
                now = after.streams[one.stream]
                more = now.episodes > one.episodes
                band = next(band for band in BANDS if band[0] <= one.chance < band[1])
                came[band].append((one.chance, more))
    print(f"\nfresh trouble in the second half of {len(every)} rehearsals: said, and came")
    error = count = 0.0
    for band in BANDS:
        cases = came[band]
        if cases:
            said = sum(chance for chance, _ in cases) / len(cases)
            true = sum(more for _, more in cases) / len(cases)
            error += abs(said - true) * len(cases)
            count += len(cases)
            print(
                f"  {band[0]:.0%} to {min(band[1], 1):.0%}: said {said:6.1%}, came {true:6.1%} of {len(cases)}"
            )
    print(f"  calibration error {error / count:.3f}")
    assert error / count <= 0.15
