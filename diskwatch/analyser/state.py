"""All that the analyser remembers of one drive: plain values that survive a restart exactly."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import msgspec

from diskwatch.analyser.wearing import Wearing
from diskwatch.errors import HistoryTooNew
from diskwatch.records import Call, Finding, Outcome, Settled
from diskwatch.trends.episodes import Stream
from diskwatch.trends.latency_now import LatencyNow
from diskwatch.trends.probed import Probed
from diskwatch.trends.spots import Spots
from diskwatch.trends.temperature import Temperature
from diskwatch.trends.warmth import Warmth

PARAMETERS = 1
"""Version of the norms, thresholds and recursions that a state was built with."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DriveState:
    """One drive's past, condensed.

    Attributes:
        parameters: version of the norms and recursions that it was built with.
        first_at: when the drive was first read, UTC seconds since 1970; None until then.
        last_at: when it was last asked, or None.
        outcome: how the pass before ended, or None.
        slept: True once it was found asleep, so that it is said once.
        unread: passes in a row that should have brought a reading and did not.
        hours: powered hours at the last reading, or None.
        firsts: counters as first read.
        latest: counters as last read with a usable value.
        base: counters as they were at the owner's last word about them; fresh defects are counted from there.
        risen: UTC day number of each counter's last rise, or none where the owner has spoken since.
        rose: powered days that a stream had seen when one of its counters last rose.
        streams: ledgers by stream.
        spots: damage for the odds rule.
        showed: UTC day number on which it first showed each condition of the table of odds.
        troubles: recent UTC day numbers of trouble that drives may share, by kind.
        bays: UTC day number of its latest link trouble by bay.
        retracts: emergency retracts as last read, or None.
        settled: the owner's last word about each stream.
        word: the owner's last word, or None.
        wearing: what it uses up of its endurance and its spare blocks.
        warmth: how warm it was on its latest days, oldest first.
        temperature: ledger of its days' highest temperatures.
        latency: what its latency has come to, by signal; what that was learnt from is kept apart.
        traffic_through: UTC day number of the last day whose traffic was taken in, or None.
        probe: what its probes have come to; None where it was never probed.
        signs: what was put to the table of causes for the call that stands: whether each sign showed.
        standing: findings that stand, by name.
        call: the call that stands, or None.
    """

    parameters: int = PARAMETERS
    first_at: int | None = None
    last_at: int | None = None
    outcome: Outcome | None = None
    slept: bool = False
    unread: int = 0
    hours: int | None = None
    firsts: Mapping[str, int] = field(default_factory=dict)
    latest: Mapping[str, int] = field(default_factory=dict)
    base: Mapping[str, int] = field(default_factory=dict)
    risen: Mapping[str, int] = field(default_factory=dict)
    rose: Mapping[str, float] = field(default_factory=dict)
    streams: Mapping[str, Stream] = field(default_factory=dict)
    spots: Spots = field(default_factory=Spots)
    showed: Mapping[str, int] = field(default_factory=dict)
    troubles: Mapping[str, tuple[int, ...]] = field(default_factory=dict)
    bays: Mapping[str, int] = field(default_factory=dict)
    retracts: int | None = None
    settled: Mapping[str, Settled] = field(default_factory=dict)
    word: Settled | None = None
    wearing: Wearing = field(default_factory=Wearing)
    warmth: tuple[Warmth, ...] = ()
    temperature: Temperature = field(default_factory=Temperature)
    latency: Mapping[str, LatencyNow] = field(default_factory=dict)
    traffic_through: int | None = None
    probe: Probed | None = None
    signs: Mapping[str, bool] = field(default_factory=dict)
    standing: Mapping[str, Finding] = field(default_factory=dict)
    call: Call | None = None


def start() -> DriveState:
    """The state of a drive that has never been asked."""
    return DriveState()


def dump(state: DriveState) -> str:
    """A state as JSON text; floats are written so that they come back to the same bits."""
    return msgspec.json.encode(state).decode()


def load(text: str) -> DriveState:
    """A state from JSON text.

    Raises:
        HistoryTooNew: it was built by a newer version.
        ValueError: it is no such text.
    """
    state = msgspec.json.decode(text, type=DriveState)
    if state.parameters > PARAMETERS:
        raise HistoryTooNew(
            f"the analyser's state has version {state.parameters}, this program knows {PARAMETERS}",
            hint="use the newer program that wrote it",
        )
    return state
