import threading
import time

from diskwatch.service.schedule import Schedule


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
    assert told[0] == "The job round failed: RuntimeError: the bus is on fire; it runs again at its next turn."


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
