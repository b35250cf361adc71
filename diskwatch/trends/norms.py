"""What still counts as sound, one row a stream of counters, and the evidence at which a stream alarms.

The budget: a drive within its norms raises a drift alarm at most once in ten years of watching, over all of its
streams together. Each stream gets a share of it; the shares sum to 1 with those of the latency, probe and
temperature signals (0.12 + 0.05 + 0.12 + 0.04 + 0.03) and a reserve of 0.02. A stream that a drive does not
have gives its share to nobody, which can only lower the number of alarms.
"""

from dataclasses import dataclass

YEAR = 365.25
BUDGET = 10 * YEAR
"""Days of watching for one false drift alarm of a drive, all streams together."""

TIGHTENED = 0.5
"""Counters alarm at this part of the guaranteed threshold.

The guaranteed threshold ignores that M overshoots. Over norms from 0.25 to 12 a year and shares of 10 to 80
years the threshold that gives exactly the promised rate was computed at 0.37 to 0.50 of it, so half keeps the
promise under the same episode assumption and saves a fifth of the delay. Computed, not proved.
"""


@dataclass(frozen=True, slots=True, kw_only=True)
class Norm:
    """One stream: counters that tell of one thing and are judged as one.

    Attributes:
        stream: its name.
        signals: counters that open an episode by rising; any of them, since they move together.
        per_year: tolerated episodes in a powered year (field practice, a proposal; no source).
        share: its part of the budget.
    """

    stream: str
    signals: tuple[str, ...]
    per_year: float
    share: float

    @property
    def per_day(self) -> float:
        """Tolerated episodes a powered day."""
        return self.per_year / YEAR

    @property
    def guaranteed(self) -> float:
        """Evidence in days at which the bound is proved."""
        return BUDGET / self.share

    @property
    def threshold(self) -> float:
        """Evidence in days at which the stream alarms."""
        return TIGHTENED * self.guaranteed


NORMS = (
    Norm(
        stream="media",
        signals=(
            "reallocated-sectors",
            "pending-sectors",
            "offline-uncorrectable",
            "reported-uncorrectable",
            "grown-defects",
            "uncorrected-reads",
            "uncorrected-writes",
        ),
        per_year=0.5,
        share=0.20,
    ),
    Norm(stream="kernel-errors", signals=("kernel-io-errors",), per_year=0.5, share=0.12),
    Norm(stream="link", signals=("crc-errors", "link-resets"), per_year=2.0, share=0.10),
    Norm(stream="timeouts", signals=("command-timeouts", "kernel-timeouts"), per_year=1.0, share=0.08),
    Norm(stream="flash-media", signals=("media-errors",), per_year=0.5, share=0.08),
    Norm(stream="power", signals=("unsafe-power-offs",), per_year=12.0, share=0.04),
)

MAY_FALL = frozenset(
    {"pending-sectors", "offline-uncorrectable", "ext4-errors", "btrfs-errors", "array-read-errors"}
)
"""Counts that fall by nature: a sector leaves them when it is rewritten or replaced, and what file systems and
arrays count begins anew when they are checked, reset or made anew."""

STREAM_OF = {signal: norm for norm in NORMS for signal in norm.signals}
"""The stream that a counter belongs to."""
