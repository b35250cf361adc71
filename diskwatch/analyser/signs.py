"""Which signs of the table of causes a drive has shown lately, and which it could have and did not."""

from collections.abc import Mapping

from diskwatch.analyser.around import Around
from diskwatch.analyser.counters import turns
from diskwatch.analyser.heat import limit_of
from diskwatch.analyser.state import DriveState
from diskwatch.judge import causes, rules
from diskwatch.judge.causes import Explained
from diskwatch.judge.neighbours import Trouble
from diskwatch.records import Cause, Finding, FindingKind, Kind, Pass, Reading
from diskwatch.trends.norms import STREAM_OF, YEAR
from diskwatch.units import day_number

LATELY = 30
"""Days that a sign counts."""

_NOTICEABLE = YEAR
"""Evidence in days from which a rise that is ordinary by itself (a CRC error, a power cut) counts as a sign."""

_DEFECTS: Mapping[str, tuple[str, ...]] = {
    "media counter": ("reallocated-sectors", "pending-sectors", "grown-defects"),
    "uncorrectable event": (
        "reported-uncorrectable",
        "offline-uncorrectable",
        "uncorrected-reads",
        "uncorrected-writes",
        "unreadable-sectors",
    ),
    "flash media errors": ("media-errors",),
}
"""Signs that one rise is enough for."""

_ORDINARY: Mapping[str, tuple[str, ...]] = {
    "CRC counter": ("crc-errors",),
    "link reset": ("link-resets",),
    "command timeout": ("command-timeouts", "kernel-timeouts"),
    "unsafe power-off": ("unsafe-power-offs",),
}
"""Signs that ask for more than the norm."""

_BY_FACT: Mapping[str, str] = {
    "fact:attribute-5": "media counter",
    "fact:attribute-196": "media counter",
    "fact:attribute-197": "media counter",
    "fact:attribute-187": "uncorrectable event",
    "fact:attribute-198": "uncorrectable event",
    "fact:self-test-unreadable": "uncorrectable event",
    "fact:unreadable-sector": "uncorrectable event",
    "fact:hot": "hot",
    "fact:warns-of-heat": "hot",
    "drift:temperature": "hot",
    "fact:spare": "spare low",
}
"""Signs that a fact is, also on a first reading."""

_SLOWER: Mapping[str, str] = {"reads slower": "read-latency", "writes slower": "write-latency"}

_WORN = 90
_TOLD_BY_ITSELF = (
    "fact:hot",
    "fact:spare",
    "fact:worn",
    "fact:worn-out",
    "fact:power-shared",
    "drift:temperature",
)
"""Findings that name their cause themselves, so that no table is asked."""

_WARNS = "fact:warns-of-"
"""How facts begin that a drive warns of; most of them name their cause as well."""

_SILENT = "fact:unreadable"
_LINKED = rules.OF_THE_LINK | {"drift:timeouts"}
_OF_THE_LINK = ("CRC counter", "link reset")
_BUILD = frozenset({"no cable", "turning platters", "no platters"})
"""What a drive is built like, which is no trouble."""

_FLASH = frozenset({Kind.NVME, Kind.SSD})

_BEYOND_NORM = frozenset({_SILENT, "fact:comes-and-goes", "fact:link-again"})
"""Facts that no drive within its norms shows, so that a sound one is no explanation."""


def put(state: DriveState, pass_: Pass, lead: Finding | None, around: Around) -> Mapping[str, bool]:
    """The signs that are put to the table: True where one showed lately, False where it could have.

    Args:
        state: the drive after the pass.
        pass_: the pass; one that brought no reading is silent of what only a reading tells.
        lead: the finding that decides the call, or None.
        around: its bay and the other drives of the machine.

    Returns:
        Nothing where there is nothing to explain, or where the leading fact tells its cause by itself. A link's
        trouble, and commands that hung beside it, stay with the link: that neither has shown since, as behind
        a new cable, makes no other cause likelier.
    """
    if lead is None or _tells_itself(lead):
        return {}
    told = {sign: showing for sign, showing in shown(state, pass_, around).items() if showing is not None}
    if _in_trouble(told):
        return told
    if lead.name == _SILENT:
        return {}
    of_the_link = lead.name in _LINKED and any(state.signs.get(sign) for sign in _OF_THE_LINK)
    return state.signs if of_the_link else told


def _in_trouble(told: Mapping[str, bool]) -> bool:
    return any(showing for sign, showing in told.items() if sign not in _BUILD)


def _tells_itself(lead: Finding) -> bool:
    warns = lead.name.startswith(_WARNS) and lead.cause is not Cause.UNCLEAR
    return (
        warns
        or lead.name in _TOLD_BY_ITSELF
        or (lead.kind is FindingKind.FACT and bool(lead.data.get("critical_warning")))
    )


def explained(told: Mapping[str, bool], lead: Finding | None) -> Explained | None:
    """What the drive's signs together point to.

    Args:
        told: the signs that are put to the table.
        lead: the finding that decides the call, or None.

    Returns:
        The cause; None where the leading fact tells it by itself. Slowness that follows the temperature is
        heat, whatever the table holds likelier.
    """
    if lead is None or _tells_itself(lead):
        return None
    if lead.data.get("follows_heat"):
        return Explained(cause=Cause.HEAT, probability=None, second=None)
    return causes.explain(
        [sign for sign, showing in told.items() if showing],
        [sign for sign, showing in told.items() if not showing],
        drifting=beyond_norm(lead),
    )


def beyond_norm(lead: Finding) -> bool:
    """Whether a finding speaks by itself against a drive within its norms."""
    return lead.kind is FindingKind.DRIFT or lead.name in _BEYOND_NORM


def shown(state: DriveState, pass_: Pass, around: Around) -> Mapping[str, bool | None]:
    """Every sign of the table: True where it showed lately, False where it could have, None where not."""
    reading, day = pass_.reading or Reading(), day_number(pass_.at)
    used = reading.number("percentage-used")
    told: dict[str, bool | None] = {
        **{sign: _shows(state, day, sign) for sign in (*_DEFECTS, *_ORDINARY)},
        "worn": None if used is None else used >= _WORN,
        "spare low": None if reading.number("available-spare") is None else False,
        "hot": None if limit_of(reading) is None else False,
        **_slowness(state, day),
        "late probe reads": _late(state, day),
        **around.signs(state, day),
    }
    for name, sign in _BY_FACT.items():
        if name in state.standing:
            told[sign] = True
    if "fact:self-assessment" in state.standing and (reading.number("grown-defects") or 0) > 0:
        told["media counter"] = True
    if told["late probe reads"] and told.get("reads slower") is False:
        # One read in a hundred that takes turns more is far below what traffic can show: no word for anybody.
        told["reads slower"] = None
    harmed = any(told.get(sign) for sign in _DEFECTS)
    told["vanished without media error"] = None if harmed else _comes_and_goes(state, day)
    # Two absences that have one reason count once: a read given up leaves a sector that waits, and what a probe
    # finds of retries may be too little yet for the mean of all traffic.
    if told.get("media counter") is False and told.get("uncorrectable event") is False:
        told["uncorrectable event"] = None
    if told.get("late probe reads") and told.get("reads slower") is False:
        told["reads slower"] = None
    return {**told, **_build(pass_, reading)}


def _build(pass_: Pass, reading: Reading) -> Mapping[str, bool]:
    """What the drive is built like, as far as can be told: some causes have nothing there to act on."""
    kind = None if pass_.drive is None else pass_.drive.kind
    told = {
        "no cable": kind is Kind.NVME,
        "turning platters": turns(pass_, reading),
        "no platters": kind in _FLASH,
    }
    return {sign: True for sign, built in told.items() if built}


def _shows(state: DriveState, day: int, sign: str) -> bool | None:
    """Whether a counter's sign shows; None where the drive has no such counter."""
    signals = _DEFECTS.get(sign) or _ORDINARY[sign]
    if not any(signal in state.latest for signal in signals):
        return None
    lately = any(day - state.risen[signal] < LATELY for signal in signals if signal in state.risen)
    if not lately or sign in _DEFECTS:
        return lately
    return any(
        state.streams[STREAM_OF[signal].stream].ledger.evidence >= _NOTICEABLE
        for signal in signals
        if signal in state.risen
    )


def _comes_and_goes(state: DriveState, day: int) -> bool | None:
    """Whether a drive was gone lately and came back; a silence that still lasts may as well be its end."""
    gone = [one for one in state.troubles.get(Trouble.GONE.value, ()) if 0 <= day - one < LATELY]
    silent = state.standing.get(_SILENT)
    if silent is None:
        return bool(gone)
    return True if any(one < day_number(silent.since) for one in gone) else None


def _late(state: DriveState, day: int) -> bool | None:
    """Whether probes found late reads; None where none was judged lately."""
    probe = state.probe
    if probe is None or not probe.judges_late or not 0 <= day - probe.on < LATELY:
        return None
    return probe.late.ledger.evidence >= _NOTICEABLE


def _slowness(state: DriveState, day: int) -> Mapping[str, bool | None]:
    """The signs of latency; one that is still being learnt, or that was not scored lately, says nothing."""
    told: dict[str, bool | None] = {}
    for sign, signal in _SLOWER.items():
        now = state.latency.get(signal)
        lately = now is not None and now.seen_on is not None and day - now.seen_on < LATELY
        if now is not None and now.evidence is not None and lately:
            told[sign] = now.evidence >= _NOTICEABLE
    heat = [one.follows_heat for one in state.latency.values() if one.follows_heat is not None]
    # A season couples a sound drive's days too: only where something is slower, it is a sign.
    if heat and (any(told.values()) or not any(heat)):
        told["slow when hot"] = any(heat)
    return told
