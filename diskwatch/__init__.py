"""diskwatch: watches drives and says what to do, and by when, before files are lost."""

__version__ = "0.1.0"
