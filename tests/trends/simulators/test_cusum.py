from itertools import islice
from math import exp, expm1, log
from random import Random

import pytest

from diskwatch.trends import ledger as ledgers
from tests.trends.simulators.cusum import Climb, calibrated, compare, cusum, error_days, ledger, mean_time

NORM = 0.5 / 365.25


def test_errors_come_on_each_day_with_the_same_chance():
    days = list(islice(error_days(Random(1), 0.1), 20_000))  # noqa: S311  # errors, not secrets
    assert days[-1] / 20_000 == pytest.approx(1 / (1 - exp(-0.1)), rel=0.03)
    assert days == sorted(set(days))


def test_the_cusum_is_the_one_that_is_computed_day_by_day():
    on = [40, 47, 300, 301, 900]
    gain = log(expm1(-30 * NORM) / expm1(-NORM))
    total, expected = 0.0, []
    for day in range(1, 901):
        total = max(0.0, total + (gain if day in on else -29 * NORM))
        if day in on:
            expected.append((day, total))
    found = list(cusum(iter(on), norm=NORM, ratio=30))
    assert [day for day, _ in found] == on
    assert dict(found) == pytest.approx(dict(expected))


def test_the_ledger_beside_it_is_the_products_without_absorption():
    state, expected = ledgers.empty(), []
    for day in range(1, 60):
        factors = ledgers.count_factors(episode=day in {20, 22, 50}, exposure=1, norm_per_day=NORM)
        state = ledgers.after(state, factors)
        if day in {20, 22, 50}:
            expected.append((day, state.evidence))
    found = list(ledger(iter([20, 22, 50]), norm=NORM))
    assert [day for day, _ in found] == [20, 22, 50]
    assert [one for _, one in found] == pytest.approx([one for _, one in expected], rel=1e-9)


def test_a_threshold_that_one_error_reaches_has_the_mean_time_of_one_error():
    climbs = [
        Climb(cusum(error_days(Random(run), NORM), norm=NORM, ratio=30))  # noqa: S311  # errors, not secrets
        for run in range(3000)
    ]
    assert mean_time(climbs, 0.5) == pytest.approx(1 / (1 - exp(-NORM)), rel=0.06)
    assert calibrated(climbs, 365.25, step=0.1) < log(30)


def test_the_ledger_takes_little_longer_than_whoever_knows_all():
    """Ten years a false alarm, tenfold rate: 183 days against 153 with 20,000 drives (`pytest -m bench`)."""
    found = compare(norm=NORM, ratio=10, years=10, runs=400, seed=1)
    assert found.years == pytest.approx(10, rel=0.02)
    assert found.cusum_years >= 10
    assert 1.0 < found.quotient < 1.35
