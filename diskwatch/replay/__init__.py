"""Recorded readings through the same analyser: what it would have said, and when."""

from diskwatch.replay.run import Progress, replay

__all__ = ["Progress", "replay"]
