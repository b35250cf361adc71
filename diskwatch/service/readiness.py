"""What a machine lacks for a full watch. Pure: decided from what was asked, with a cure for each lack."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from diskwatch.errors import DiskwatchError
from diskwatch.records import Kind, Outcome, Pass
from diskwatch.units import plain


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One thing that a full watch needs.

    Attributes:
        name: what was looked at: ``history``, ``watch``, ``drives``, ``kernel log``, or the device of a drive.
        lacking: whether something is missing.
        text: what was found, one sentence.
        cure: what to do; None where nothing is missing or nothing can be done.
    """

    name: str
    lacking: bool
    text: str
    cure: str | None = None


_CURES: Mapping[Outcome, str] = {
    Outcome.NO_TOOL: "install smartctl (on Debian and Ubuntu: apt install smartmontools), or name it in the "
    "settings under [smart] command",
    Outcome.REFUSED: "watch as root, as the service does",
    Outcome.TIMED_OUT: "copy off what matters from this drive first, then check its cable; it is asked again",
    Outcome.ABSENT: "see whether it is plugged in",
    Outcome.GARBLED: "see to what is said here, then run this again",
    Outcome.NO_SMART: "see to what is said here; until then only its traffic is watched",
}


def checks(
    passes: Iterable[tuple[str, Pass]],
    troubles: Iterable[str],
    *,
    history: str | None,
    watcher: int | None,
    kernel_log: DiskwatchError | None = None,
) -> tuple[Check, ...]:
    """Judge readiness.

    Args:
        passes: (what the drive is called, how asking it went), one a drive.
        troubles: what kept the listing of drives from being complete.
        history: why the history cannot be written; None where it can, or where somebody else writes it.
        watcher: process number of whoever watches now, or None.
        kernel_log: why the kernel's log cannot be read; None where it can.
    """
    told = tuple(troubles)
    asked = tuple(passes)
    # A missing tool is one trouble of the machine, not one of each drive.
    drives = tuple(
        _drive(name, one)
        for name, one in asked
        if not (one.outcome is Outcome.NO_TOOL and one.explanation in told)
    )
    found = [
        Check(name="drives", lacking=False, text=f"{len(asked)} found.")
        if asked
        else Check(
            name="drives",
            lacking=True,
            text="No drive was found.",
            cure="on a container or guest, watch on the machine that has the drives",
        )
    ]
    found += [Check(name="drives", lacking=True, text=plain(one)) for one in told]
    found += drives
    found.append(
        Check(name="kernel log", lacking=False, text="It can be read.")
        if kernel_log is None
        else Check(
            name="kernel log",
            lacking=True,
            text=f"{plain(kernel_log.what)}; failed requests and resets of links are not seen.",
            cure=kernel_log.hint,
        )
    )
    found.append(
        Check(name="history", lacking=False, text="It can be written.")
        if history is None
        else Check(
            name="history", lacking=True, text=plain(history), cure="name a folder of your own with --state"
        )
    )
    found.append(
        Check(name="watch", lacking=False, text=f"Process {watcher} is watching.")
        if watcher is not None
        else Check(
            name="watch",
            lacking=False,
            text="Nobody is watching now.",
            cure="start 'diskwatch watch', or leave the dashboard open",
        )
    )
    return tuple(found)


def _drive(name: str, one: Pass) -> Check:
    outcome = one.outcome
    if outcome is Outcome.READ:
        return Check(name=name, lacking=False, text="Its readings can be read.")
    told = plain(one.explanation or outcome.value)
    # Sleep is rest, and a virtual disk has nothing to read: neither can or should be cured.
    virtual = one.drive is not None and one.drive.kind is Kind.VIRTUAL
    if outcome is Outcome.ASLEEP or (outcome is Outcome.NO_SMART and virtual):
        return Check(name=name, lacking=False, text=told)
    return Check(name=name, lacking=True, text=told, cure=_CURES.get(outcome))
