"""The nouns of the house: frozen records that every room may speak of.

Times are UTC, whole seconds since 1970. "Not known" is None, never zero. Units stand in the name of the field
or in its line of the docstring.
"""

from diskwatch.records.bays import Bays, DriveLine, LastPass, SignalNow
from diskwatch.records.daybook import Entry
from diskwatch.records.drive import Drive, Identity, Kind, Mount, Place
from diskwatch.records.event import Event, EventKind
from diskwatch.records.forecast import Forecast, LimitSource
from diskwatch.records.io import ClassDay, Direction, IoCounts, IoRollup, IoSpan
from diskwatch.records.judgement import Call, CallWord, Cause, Finding, FindingKind
from diskwatch.records.listened import LeftOff, Listened
from diskwatch.records.margin import Margin
from diskwatch.records.odds import Odds
from diskwatch.records.probe import REQUEST_BYTES, ProbeDay
from diskwatch.records.reading import (
    ARRAYS,
    FILE_SYSTEMS,
    KERNEL_LOG,
    SENSES,
    Attribute,
    Failing,
    Outcome,
    Pass,
    PassDay,
    Reading,
    SelfTest,
    SignalKind,
    Value,
)
from diskwatch.records.replayed import Drift, ReplayedDrive, ReplaySummary, summed
from diskwatch.records.round import DriveRound, KnownDrive, Learnt, Round
from diskwatch.records.settled import Settled
from diskwatch.records.warning import DriveWarning
from diskwatch.records.way import Way

__all__ = [
    "ARRAYS",
    "FILE_SYSTEMS",
    "KERNEL_LOG",
    "REQUEST_BYTES",
    "SENSES",
    "Attribute",
    "Bays",
    "Call",
    "CallWord",
    "Cause",
    "ClassDay",
    "Direction",
    "Drift",
    "Drive",
    "DriveLine",
    "DriveRound",
    "DriveWarning",
    "Entry",
    "Event",
    "EventKind",
    "Failing",
    "Finding",
    "FindingKind",
    "Forecast",
    "Identity",
    "IoCounts",
    "IoRollup",
    "IoSpan",
    "Kind",
    "KnownDrive",
    "LastPass",
    "Learnt",
    "LeftOff",
    "LimitSource",
    "Listened",
    "Margin",
    "Mount",
    "Odds",
    "Outcome",
    "Pass",
    "PassDay",
    "Place",
    "ProbeDay",
    "Reading",
    "ReplaySummary",
    "ReplayedDrive",
    "Round",
    "SelfTest",
    "Settled",
    "SignalKind",
    "SignalNow",
    "Value",
    "Way",
    "summed",
]
