"""Invented drives that wear, gather errors and slow down, to see whether forecasts keep their word.

Seeded; the laws stand beside each. Nothing here was fitted to real drives.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from math import exp, expm1, log, sqrt
from random import Random

from diskwatch.trends import episodes, wear as wears
from diskwatch.trends.interval import Interval
from diskwatch.trends.latency_forecast import forecast
from diskwatch.trends.norms import NORMS
from diskwatch.trends.waiting import after_alarm

USERS = {
    # name: (jumps of the level of use a year, standard deviation of the logarithm of a jump, share)
    "calm": (0.0, 0.0, 0.25),
    "rare changes": (0.25, 0.5, 0.2),
    "usual": (1.0, 0.5, 0.4),
    "wild": (1.0, log(2.2), 0.15),
}
"""Whose use changes how often; "usual" is the population that the study speaks of."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """One forecast and what became of it.

    Attributes:
        interval: what was said.
        came: days until it came true; infinite where it did not within the time simulated.
        kind: which part of the population.
    """

    interval: Interval
    came: float
    kind: str

    @property
    def middle(self) -> float:
        """The geometric middle of the interval in days; infinite where it has no upper end."""
        low, high = self.interval.low, self.interval.high
        return sqrt(low * high) if low is not None and high is not None else float("inf")

    @property
    def held(self) -> bool:
        """Whether the interval held the outcome."""
        low, high = self.interval.low, self.interval.high
        return low is not None and low <= self.came <= (high if high is not None else float("inf"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Coverage:
    """How many of the forecasts held, with one Monte-Carlo standard error, and how wide they are."""

    share: float
    error: float
    told: int
    ratio: float

    def __str__(self) -> str:
        return (
            f"{100 * self.share:5.1f} % +- {100 * self.error:.1f} of {self.told}, upper/lower {self.ratio:.1f}"
        )


def coverage(told: list[Told]) -> Coverage:
    """What a list of forecasts was worth."""
    share = sum(one.held for one in told) / len(told)
    ratios = sorted(
        one.interval.high / one.interval.low if one.interval.high and one.interval.low else float("inf")
        for one in told
    )
    return Coverage(
        share=share,
        error=sqrt(max(share * (1 - share), 1 / len(told)) / len(told)),
        told=len(told),
        ratio=ratios[len(ratios) // 2],
    )


def show(line: str) -> None:
    """A line of a benchmark's table."""
    print(line)  # noqa: T201 - what a benchmark is run for


def poisson(chance: Random, mean: float) -> int:
    """Knuth's way, good for small means."""
    bound, count, product = exp(-mean), 0, chance.random()
    while product > bound:
        count += 1
        product *= chance.random()
    return count


def _writing(chance: Random, kind: str) -> Iterator[float]:
    """What is written on each day: gamma of relative variance 1.6 about a jumping level, half at weekends."""
    jumps, size, _ = USERS[kind]
    level = 0.0
    day = 0
    while True:
        for _ in range(poisson(chance, jumps / 365.25) if jumps else 0):
            level += chance.gauss(0, size)
        week = 0.5 if day % 7 >= 5 else 1.2
        yield exp(level) * week * chance.gammavariate(1 / 1.6, 1.6)
        day += 1


def worn(chance: Random, kind: str | None = None, *, count_volume: bool = True) -> Told | None:
    """A drive of a random user, watched 0.3 to 3 years, and the forecast on its last day.

    Its level of use at the start would use it up in 1 to 15 years; a tenth of the days it is off.
    """
    if kind is None:
        kind = chance.choices(list(USERS), [share for _, _, share in USERS.values()])[0]
    per_day = 100 / (365.25 * exp(chance.uniform(0, log(15))))
    watched = int(365.25 * chance.uniform(0.3, 3))
    true = chance.uniform(0, 60)
    writing = _writing(chance, kind)
    total = 0.0
    state: wears.Wear | None = None
    since = 0
    for day in range(watched):
        if chance.random() < 0.1:
            continue
        amount = next(writing)
        true += amount * per_day / 0.9
        total += amount
        written = 1e9 * total if count_volume else None
        percent = int(true)
        if state is None:
            state = wears.begin(day=day, percent=percent, written=written)
        else:
            state = wears.seen(state, day=day, percent=percent, written=written, powered=1.0)
        since = day
        if true >= 99:
            break
    if state is None:
        return None
    interval = wears.forecast(state, day=since)
    if not interval.known or interval.high == 0:
        return None
    came = 0.0
    while true < 100 and came < 365.25 * 60:
        came += 1
        if chance.random() >= 0.1:
            true += next(writing) * per_day / 0.9
    return Told(interval=interval, came=came if true >= 100 else float("inf"), kind=kind)


def told_by(make: Callable[[Random], Told | None], *, seed: int, drives: int) -> list[Told]:
    """The forecasts of many drives, those left out about which there was nothing to say."""
    chance = Random(seed)  # noqa: S311 - a simulation, seeded so that it repeats itself
    return [told for _ in range(drives) if (told := make(chance)) is not None]


GROWTHS = {"steady": 0.0, "doubling in 90 days": 90.0, "in 60": 60.0, "in 30": 30.0, "in 15": 15.0}
"""Days in which the rate of episodes doubles; 0 where it does not."""


def clustered(
    chance: Random, growth: str, *, before: int, more: int = 5, later: float = 0.0, absorbed: float = 7.0
) -> Told:
    """A drive with episodes of which some came, and the forecast of when some more will have come.

    It begins with one in 12 to 90 open days, and every episode absorbs some days after it.

    Args:
        chance: where the scatter comes from.
        growth: of `GROWTHS`.
        before: episodes that came.
        more: that are to come.
        later: how long after the last of them the forecast is made, in mean gaps; left out where the next came
            before.
        absorbed: days after an episode on which no other opens.
    """
    rate = exp(chance.uniform(log(1 / 90), log(1 / 12)))
    doubling = GROWTHS[growth]
    pace = log(2) / doubling if doubling else 0.0
    opened, now, times = 0.0, 0.0, [0.0]
    while len(times) < before + more:
        passed, level = chance.expovariate(1), rate * exp(pace * opened)
        wait = log(1 + pace * passed / level) / pace if pace else passed / level
        opened, now = opened + wait, now + wait + absorbed
        times.append(now)
    seen = times[before - 1]
    asked = min(seen + later * seen / (before - 1), times[before] - 1e-6)
    interval = after_alarm(more, episodes=times[:before], now=asked, absorbed=absorbed)
    return Told(interval=interval, came=times[-1] - asked, kind=growth)


def alarmed(chance: Random, times_norm: float, *, doubling: float = 0.0, more: int = 5) -> Told | None:
    """A drive whose media episodes come so many times as often as the norm, asked on the day of its alarm.

    None where its alarm came before there were episodes enough to say anything.
    """
    norm = NORMS[0]
    stream = episodes.begin(0)
    days: list[float] = []
    asked, day = None, 0
    while asked is None or len([one for one in days if one > asked]) < more:
        day += 1
        stream = episodes.next_day(stream, day=day, exposure=1.0, norm_per_day=norm.per_day)
        level = times_norm * norm.per_day * (2 ** (day / doubling) if doubling else 1.0)
        if chance.random() < -expm1(-level):
            count = stream.episodes
            stream = episodes.rise(stream, norm_per_day=norm.per_day)
            if stream.episodes > count:
                days.append(float(day))
        if asked is None and stream.ledger.evidence >= norm.threshold:
            asked = float(day)
            interval = after_alarm(more, episodes=days, now=asked)
            if not interval.known:
                return None
    return Told(interval=interval, came=day - asked, kind="at the alarm")


def slowing(chance: Random, *, wander: float = 0.5, alike: float = 0.6, noise: float = 0.05) -> Told | None:
    """A disk that slows down from the first day on, and the forecast of when it takes twice as long.

    It would take 60 to 500 days at its first slope, whose logarithm wanders by ``wander`` in 90 days; a day's
    shift has noise that resembles the day before. It is asked once it is 20 to 70 % slower; None where it is
    not so soon enough, or where there is nothing to say.
    """
    log_slope = log(log(2) / exp(chance.uniform(log(60), log(500))))
    asked_at = log(1 + chance.uniform(0.2, 0.7))
    level, shake, day = 0.0, chance.gauss(0, noise), 0
    days: list[float] = []
    shifts: list[float] = []
    interval: Interval | None = None
    asked = 0.0
    while level < log(2) and day < 5000:
        day += 1
        log_slope += wander / sqrt(90) * chance.gauss(0, 1)
        level += exp(log_slope)
        shake = alike * shake + noise * sqrt(1 - alike**2) * chance.gauss(0, 1)
        if chance.random() < 0.85 and interval is None:
            days.append(float(day))
            shifts.append(level + shake)
        if interval is None and level >= asked_at and len(days) >= 8:
            interval, asked = forecast(days, shifts), days[-1]
    if interval is None or not interval.known or interval.high == 0:
        return None
    return Told(interval=interval, came=day - asked if level >= log(2) else float("inf"), kind="slowing")
