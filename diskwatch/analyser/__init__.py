"""The one state machine from readings to findings and a call.

``advance(state, pass) -> step`` and ``settle(state, word) -> step`` know no clock, file or process: live
readings, replay of recorded ones and rehearsal of a failure run the very same code.
"""

from diskwatch.analyser.advance import Step, advance
from diskwatch.analyser.around import Around
from diskwatch.analyser.explain import Explanation, explain
from diskwatch.analyser.forecasts import COUNTED, alarmed, forecasts
from diskwatch.analyser.outcomes import UNREAD_LIMIT
from diskwatch.analyser.probing import ProbeStep, probe_values, take_in_probe
from diskwatch.analyser.settle import settle
from diskwatch.analyser.state import DriveState, dump, load, start
from diskwatch.analyser.traffic import (
    TrafficStep,
    dump_latency,
    load_latency,
    measured,
    no_latency,
    take_in_traffic,
)

__all__ = [
    "COUNTED",
    "UNREAD_LIMIT",
    "Around",
    "DriveState",
    "Explanation",
    "ProbeStep",
    "Step",
    "TrafficStep",
    "advance",
    "alarmed",
    "dump",
    "dump_latency",
    "explain",
    "forecasts",
    "load",
    "load_latency",
    "measured",
    "no_latency",
    "probe_values",
    "settle",
    "start",
    "take_in_probe",
    "take_in_traffic",
]
