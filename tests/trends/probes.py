"""An invented rotating disk under the probe: a short seek, a uniform wait, sometimes retries of whole turns."""

from random import Random

TURN = 60_000 / 7200


def band_reads(chance: Random, count: int, *, retried: float = 0.0, slower: float = 1.0) -> list[float]:
    """Times in milliseconds of reads in a narrow band; a geometric number of retries, half each."""
    times = []
    for _ in range(count):
        time = slower * (0.2 + chance.uniform(0.9, 1.9) + chance.uniform(0, TURN))
        if chance.random() < retried:
            time += TURN
            while chance.random() < 0.5:
                time += TURN
        times.append(time)
    return times


def slice_times(chance: Random, count: int, *, retried: float = 0.0) -> list[float]:
    """Times of requests back to back, of which some are held up by a retry."""
    return [chance.gauss(2.0, 0.1) + (TURN if chance.random() < retried else 0.0) for _ in range(count)]


def seeded(seed: int) -> Random:
    """Chance that repeats itself."""
    return Random(seed)  # noqa: S311 - a simulation, no secret
