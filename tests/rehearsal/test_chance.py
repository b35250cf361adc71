from statistics import mean, variance

import pytest

from diskwatch.rehearsal.chance import poisson, share_of, stream


def test_a_part_draws_the_same_numbers_whatever_other_parts_do():
    assert stream(1, "a", "work").random() == stream(1, "a", "work").random()
    different = {stream(*names).random() for names in ((1, "a"), (2, "a"), (1, "b"), (1, "a", "b"), (1, "ab"))}
    assert len(different) == 5


@pytest.mark.parametrize("expected", [0.02, 1.0, 12.0, 29.0, 60.0])
def test_a_poisson_count_has_its_mean_and_the_same_variance(expected):
    rng = stream(1, "poisson")
    drawn = [poisson(rng, expected) for _ in range(20_000)]
    assert mean(drawn) == pytest.approx(expected, rel=0.05, abs=0.01)
    assert variance(drawn) == pytest.approx(expected, rel=0.06, abs=0.01)


@pytest.mark.parametrize(("count", "chance"), [(5, 0.3), (50, 0.02), (400, 0.01), (400, 0.4)])
def test_a_share_has_its_mean_and_is_never_more_than_there_are(count, chance):
    rng = stream(1, "share")
    drawn = [share_of(rng, count, chance) for _ in range(20_000)]
    assert mean(drawn) == pytest.approx(count * chance, rel=0.05)
    assert 0 <= min(drawn) <= max(drawn) <= count


def test_nothing_happens_without_things_or_chance_and_everything_with_certainty():
    rng = stream(1, "edge")
    assert (poisson(rng, 0), poisson(rng, -1), share_of(rng, 0, 0.5), share_of(rng, 9, 0)) == (0, 0, 0, 0)
    assert share_of(rng, 9, 1.5) == 9
