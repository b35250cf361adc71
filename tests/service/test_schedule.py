import random
import threading
import time
from itertools import pairwise

import pytest

from diskwatch.service.schedule import EARLY, Schedule
from diskwatch.service.watch import GUARD
from tests.service.simulated import World

HOUR = 3_600
ROUND, UPKEEP = 1_800, 3_600


def test_a_job_runs_at_once_and_a_failing_one_is_told_of_and_runs_again():
    told: list[str] = []
    twice, runs = threading.Event(), []

    def fails():
        runs.append(1)
        if len(runs) == 2:
            twice.set()
        raise RuntimeError("the bus is on fire")

    schedule = Schedule(told.append)
    schedule.every("round", 0.05, fails)
    schedule.start()
    assert twice.wait(5)
    schedule.stop()
    assert "The job round failed: RuntimeError: the bus is on fire; it runs again at its next turn." in told


def test_a_job_that_is_still_running_is_not_run_twice_and_that_is_told():
    told, release = [], threading.Event()
    overlapping = threading.Event()
    running = []

    def slow():
        running.append(1)
        release.wait(5)

    def mishap(text):
        told.append(text)
        overlapping.set()

    schedule = Schedule(mishap)
    schedule.every("round", 0.05, slow)
    schedule.start()
    assert overlapping.wait(5)
    assert len(running) == 1
    release.set()
    schedule.stop()
    assert "still running" in told[0]


def test_a_slow_round_does_not_hold_up_the_counting():
    release, counted = threading.Event(), threading.Event()
    schedule = Schedule(lambda _text: None)
    schedule.every("round", 60, lambda: release.wait(5), place="rounds")
    schedule.every("traffic", 60, counted.set)
    schedule.start()
    assert counted.wait(5)
    release.set()
    schedule.stop()


def test_after_the_clock_moved_every_job_is_planned_from_now_on():
    ran = threading.Event()
    schedule = Schedule(lambda _text: None)
    schedule.every("round", 3600, lambda: None)
    schedule.every("traffic", 0.05, ran.set)
    schedule.start()
    assert ran.wait(5)
    ran.clear()
    schedule.clock_moved()
    assert ran.wait(5)
    schedule.stop()


def test_what_is_to_be_done_soon_is_done_once_however_often_it_is_asked_for():
    done, schedule = [], Schedule(lambda _text: None)
    schedule.start()
    for _ in range(5):
        schedule.soon("news", 0.05, lambda: done.append(1))
    until = time.monotonic() + 5
    while not done and time.monotonic() < until:
        time.sleep(0.01)
    schedule.soon("news", 0.0, lambda: done.append(2))
    while len(done) < 2 and time.monotonic() < until:
        time.sleep(0.01)
    schedule.stop()
    assert done == [1, 2]


@pytest.fixture
def world(monkeypatch):
    made = World(monkeypatch)
    made.every("round", ROUND)
    made.every("upkeep", UPKEEP)
    made.start()
    return made


def gaps(world, name):
    return [later - earlier for earlier, later in pairwise(world.runs[name])]


def test_a_clock_set_forward_or_back_changes_no_jobs_pace(world):
    for by in (HOUR, -HOUR, 26 * HOUR, -365 * 24 * HOUR, 400 * 24 * HOUR, 90, -90):
        world.pass_(5 * HOUR + 17)
        world.set_clock(by)
    world.pass_(5 * HOUR)
    for name, every in (("round", ROUND), ("upkeep", UPKEEP)):
        assert all(every * (1 - EARLY) <= gap <= every + GUARD for gap in gaps(world, name)), name
    assert world.mishaps == []


def test_a_clock_that_is_set_again_and_again_puts_no_round_off(world):
    for turn in range(400):
        world.pass_(1000)
        world.set_clock(-30 if turn % 2 else 45)
    assert all(ROUND * (1 - EARLY) <= gap <= ROUND + GUARD for gap in gaps(world, "round"))


def test_after_a_sleep_the_round_that_fell_into_it_is_made_once_within_the_guards_time(world):
    world.pass_(10 * HOUR + 600)
    before = len(world.runs["round"])
    world.sleep(9 * HOUR)
    woke = world.steady
    world.pass_(HOUR)
    made = world.runs["round"][before:]
    assert made[0] - woke <= GUARD + 1
    assert all(gap >= ROUND * (1 - EARLY) for gap in gaps(world, "round"))


def test_a_short_sleep_makes_no_round_come_early_or_late(world):
    world.pass_(600)
    world.sleep(300)
    world.pass_(2 * HOUR)
    assert all(ROUND * (1 - EARLY) <= gap <= ROUND + GUARD for gap in gaps(world, "round"))


def test_what_is_to_be_done_soon_is_not_lost_to_a_clock_that_is_set_back(world):
    done = []
    world.schedule.soon("news", 15, lambda: done.append(world.steady))
    began = world.steady
    world.set_clock(-24 * HOUR)
    world.pass_(HOUR)
    assert len(done) == 1
    assert done[0] - began <= 15 + GUARD


@pytest.mark.parametrize("zone", ["Europe/Berlin", "Australia/Lord_Howe"])
def test_over_24_months_with_summer_time_sleeps_and_set_clocks_no_round_is_lost_or_doubled(
    world, monkeypatch, zone
):
    monkeypatch.setenv("TZ", zone)
    time.tzset()
    chance = random.Random(zone)  # noqa: S311 - the same invented life each time
    slept = 0.0
    longest = 0.0
    for _ in range(24 * 31):
        world.pass_(chance.uniform(10, 34) * HOUR)
        what = chance.random()
        if what < 0.5:
            nap = chance.choice((20, 900, 4 * HOUR, 12 * HOUR, 9 * 24 * HOUR if what < 0.01 else HOUR))
            world.sleep(nap)
            slept, longest = slept + nap, max(longest, nap)
        elif what < 0.7:
            world.set_clock(chance.choice((-HOUR, HOUR, 7, -7, 86_400, -86_400, 1e7, -1e7)))
    monkeypatch.delenv("TZ")
    time.tzset()
    assert world.steady > 24 * 30 * 24 * HOUR
    made = gaps(world, "round")
    assert min(made) >= ROUND * (1 - EARLY), "doubled"
    assert max(made) <= longest + ROUND + GUARD, "lost"
    # Every stretch awake has its rounds: together no fewer than the time awake holds.
    assert len(made) >= (world.awake - 744 * GUARD) / (ROUND + 1) - 744 * EARLY
    assert world.mishaps == []
