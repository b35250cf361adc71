"""The owner's word about a drive."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Settled:
    """The owner says that something has been seen to: the cable was changed, the drive replaced.

    Attributes:
        at: when it was said, UTC seconds since 1970.
        because: what was done, in the owner's words.
        signals: the signals that it is about; empty where it is about all that stands.
        replaced_by: the drive that took its place, as the owner names it; None where it stays in use.
    """

    at: int
    because: str
    signals: tuple[str, ...] = ()
    replaced_by: str | None = None

    def about(self, signals: tuple[str, ...]) -> bool:
        """Whether it speaks of any of these signals."""
        return not self.signals or not set(self.signals).isdisjoint(signals)
