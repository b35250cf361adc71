import threading
import time

import pytest

from diskwatch.cli.pace import FASTEST, SLOWEST, Pace


def lived(pace: Pace, days: int, until: threading.Event | None = None) -> list[int]:
    """Live through days in a thread of their own; the list grows as they pass."""
    passed: list[int] = []

    def live() -> None:
        for day in range(days):
            if not pace.passed(1.0):
                break
            passed.append(day)
        if until is not None:
            until.set()

    threading.Thread(target=live, daemon=True).start()
    return passed


def wait_for(what, seconds: float = 5.0) -> bool:
    until = time.monotonic() + seconds
    while not what() and time.monotonic() < until:
        time.sleep(0.005)
    return bool(what())


def test_without_a_pace_days_pass_as_fast_as_they_go():
    over = threading.Event()
    passed = lived(Pace(None), 10_000, over)
    assert over.wait(5)
    assert len(passed) == 10_000


def test_a_pace_holds_days_back():
    pace = Pace(100.0)
    begun = time.monotonic()
    for _ in range(5):
        assert pace.passed(1.0)
    assert time.monotonic() - begun >= 0.05


def test_halted_time_stands_still_until_it_goes_on():
    pace, over = Pace(None), threading.Event()
    pace.halt()
    passed = lived(pace, 3, over)
    assert not over.wait(0.05)
    assert passed == []
    pace.halt()
    assert over.wait(5)


def test_a_step_is_one_day_and_then_time_stands_still_again():
    pace = Pace(None)
    pace.halt()
    passed = lived(pace, 99)
    pace.step()
    assert wait_for(lambda: pace.halted)
    before = len(passed)
    assert before <= 1
    pace.step()
    assert wait_for(lambda: len(passed) == before + 1 and pace.halted)
    pace.end()


def test_a_pace_is_doubled_and_halved_within_reason_also_while_a_day_is_waited_for():
    pace, over = Pace(SLOWEST), threading.Event()
    lived(pace, 1, over)
    for _ in range(40):
        pace.change(2)
    assert pace.speed == FASTEST
    assert over.wait(5)
    for _ in range(40):
        pace.change(0.5)
    assert pace.speed == SLOWEST


@pytest.mark.parametrize("halted", [False, True])
def test_what_is_ended_waits_for_nothing_any_more(halted):
    pace, over = Pace(SLOWEST), threading.Event()
    if halted:
        pace.halt()
    passed = lived(pace, 9, over)
    pace.end()
    assert over.wait(5)
    assert passed == []
