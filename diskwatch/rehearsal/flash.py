"""Flash: latency, the write cliff behind a full cache, wear by what is written, spare blocks.

Wear is write amplification times bytes written over capacity, in turns of program and erase; the share used is
that over the turns that the maker rates. Latencies, rates and the odds of a block going bad are common
practice, no source.
"""

from dataclasses import dataclass, field
from random import Random

from diskwatch.rehearsal.chance import poisson, share_of
from diskwatch.rehearsal.rotating import Mix, Service

_PAGE = 16_384
"""Bytes that are lost together: a page of flash."""

THROTTLED = 3.0
"""How many times as long requests take while the drive slows itself down to cool."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Chips:
    """A solid-state drive's make.

    Attributes:
        capacity: bytes.
        read_ms: time until the first byte of a read.
        write_ms: time until a write is taken into the cache.
        rate: bytes a second on the way out, and into the cache.
        slow_rate: bytes a second once the cache is full.
        cache: bytes that the cache holds; it empties at the slow rate while the drive rests.
        turns: turns of program and erase that the maker rates.
        amplification: bytes programmed for each byte that the computer writes.
        spare_blocks: blocks held in reserve.
    """

    capacity: int
    read_ms: float = 0.08
    write_ms: float = 0.03
    rate: float = 2_000e6
    slow_rate: float = 300e6
    cache: float = 40e9
    turns: float = 1_000.0
    amplification: float = 2.0
    spare_blocks: int = 400

    def worn_turns(self, written: float) -> float:
        """Turns of program and erase that so many bytes from the computer have cost."""
        return self.amplification * written / self.capacity

    def used_percent(self, written: float) -> int:
        """Share of the rated endurance that is used up, in whole percent; the log's field ends at 255."""
        return min(255, int(100 * self.worn_turns(written) / self.turns))


@dataclass(slots=True, kw_only=True)
class Cells:
    """What the drive's flash has been through.

    Attributes:
        written: bytes that the computer ever wrote.
        cached: bytes in the cache that are still to be moved.
        bad_blocks: blocks replaced from the reserve.
        media_errors: times that data could not be recovered.
        lost: first logical blocks of what could not be recovered and was not written anew since.
        losses: blocks that go bad by themselves a year (a fault), beside those that wear takes.
    """

    written: float = 0.0
    cached: float = 0.0
    bad_blocks: int = 0
    media_errors: int = 0
    lost: list[int] = field(default_factory=list)
    losses: float = 0.0

    def write(self, chips: Chips, amount: float, seconds: float) -> float:
        """Write, and let the cache empty itself over the span.

        Returns:
            The share of the bytes that met a full cache, 0 to 1.
        """
        room = max(0.0, chips.cache - self.cached)
        moved = chips.slow_rate * seconds
        over = max(0.0, amount - room - 0.5 * moved)
        self.cached = min(chips.cache, max(0.0, self.cached + amount - moved))
        self.written += amount
        return over / amount if amount > 0 else 0.0

    def age(self, rng: Random, chips: Chips, amount: float, days: float) -> None:
        """Lose blocks: more of them the further wear has come beyond half of what is rated."""
        share = chips.worn_turns(self.written) / chips.turns
        worn = chips.worn_turns(amount) / chips.turns * chips.spare_blocks * 0.8 * max(0.0, share - 0.5) ** 2
        lost = poisson(rng, worn + self.losses * days / 365.25)
        before = self.bad_blocks
        self.bad_blocks = min(chips.spare_blocks, before + lost)
        # What is written anew lies elsewhere from then on.
        for _ in range(share_of(rng, len(self.lost), min(1.0, amount / chips.capacity))):
            self.lost.pop(rng.randrange(len(self.lost)))
        # What a dying block held is nearly always moved in time.
        for _ in range(poisson(rng, 0.01 * (self.bad_blocks - before))):
            self.media_errors += 1
            self.lost.append(int(rng.random() * chips.capacity) // _PAGE * (_PAGE // 512))

    def spare_percent(self, chips: Chips) -> int:
        """Share of the reserve that is left, in whole percent."""
        return 100 * (chips.spare_blocks - self.bad_blocks) // chips.spare_blocks


def reads(chips: Chips, mix: Mix, *, throttled: bool) -> Service:
    """What a read costs."""
    mean = chips.read_ms * (1 - 0.5 * mix.cached) + mix.size / chips.rate * 1000
    return _scaled(mean, throttled=throttled)


def writes(chips: Chips, mix: Mix, *, cliff: float, throttled: bool) -> Service:
    """What a write costs.

    Args:
        chips: the drive's make.
        mix: what the writes are like.
        cliff: share of them that meets a full cache.
        throttled: whether the drive slows itself down.
    """
    fast = chips.write_ms + mix.size / chips.rate * 1000
    slow = chips.write_ms + mix.size / chips.slow_rate * 1000
    return _scaled(fast + cliff * (slow - fast), throttled=throttled)


def _scaled(mean: float, *, throttled: bool) -> Service:
    mean *= THROTTLED if throttled else 1.0
    return Service(mean_ms=mean, variance=0.25 * mean**2)
