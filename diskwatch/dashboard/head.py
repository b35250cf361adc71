"""The lines above the bands: who watches, when the last pass was, what is wrong with the watch itself. Pure."""

from rich.text import Text

from diskwatch.dashboard.ages import ago, clock
from diskwatch.dashboard.cells import cut, ends, fit
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.weight import Face
from diskwatch.records import Bays
from diskwatch.units import plain, say_span

PRODUCT = "diskwatch"
_LOUD = "bold reverse"
_PATIENCE = 5


def last_pass_at(bays: Bays) -> int | None:
    """When the newest pass over any drive ended, UTC seconds since 1970; None before the first."""
    return max((line.last_pass.at for line in bays.drives if line.last_pass is not None), default=None)


def is_stale(bays: Bays, now: int, every: int) -> bool:
    """Whether the newest pass is older than two intervals, so that at least one pass did not come."""
    at = last_pass_at(bays)
    return at is not None and now - at > 2 * every


def top_line(snapshot: Snapshot | None, watching: str, now: int, width: int, every: int) -> Text:
    """The first line of the screen.

    Args:
        snapshot: what is known; None before the first answer.
        watching: how this screen was opened, one sentence; stands until more is known.
        now: the current time, UTC seconds since 1970.
        width: columns that it must keep within.
        every: seconds between two passes.

    Returns:
        One line. On a narrow screen the time gives way first, the product's name next, never the watcher.
    """
    bays = snapshot.bays if snapshot is not None else None
    if bays is None:
        watcher = brief = Text(plain(watching))
        passes = [Text("no pass known yet")]
    else:
        watcher, brief = Text(f"watched by process {bays.watcher}"), Text(f"watched by {bays.watcher}")
        if bays.watcher is None:
            watcher, brief = Text(" NOBODY IS WATCHING ", style=_LOUD), Text("NOBODY IS WATCHING", style=_LOUD)
        passes = _passes(bays, now, every)
    product, hour = Text(PRODUCT, style="bold"), Text(clock(now))
    choices: list[tuple[list[Text], list[Text]]] = []
    for told in passes:
        choices += [([product, hour], [told, watcher]), ([product], [told, watcher]), ([told], [brief])]
    left, right = choices[-1]
    for left, right in choices:
        if _joined([*left, *right]).cell_len <= width:
            break
    return ends(_joined(left), _joined(right), width)


def notes(told: tuple[str, ...], width: int, face: Face, *, most: int) -> tuple[Text, ...]:
    """Troubles as lines under the first one.

    Args:
        told: the troubles, gravest first (`troubles`).
        width: columns that each line must keep within.
        face: what the terminal can show.
        most: the most lines that there is room for, at least 1; the last one counts what is left over.
    """
    if len(told) > most:
        left = len(told) - most + 1
        told = (*told[: most - 1], f"{left} {'more ' if most > 1 else ''}troubles: press ? to read them.")
    return tuple(
        fit(Text.assemble(("! ", "bold"), (cut(text, width - 2, face.mark), "bold")), width) for text in told
    )


def troubles(snapshot: Snapshot | None, now: int, every: int, *, waited: int = 0) -> tuple[str, ...]:
    """All that is wrong with the screen or the watch, one harmless sentence each, gravest first.

    Args:
        snapshot: what is known; None before the first answer.
        now: the current time, UTC seconds since 1970.
        every: seconds between two passes.
        waited: for how many seconds the history has owed an answer.
    """
    told: list[str] = []
    if waited > _PATIENCE:
        told.append(f"Not up to date: the history has not answered for {say_span(waited)}.")
    if snapshot is None:
        return tuple(told)
    if snapshot.error is not None:
        told.append(f"Not up to date: {plain(snapshot.error)}")
    bays = snapshot.bays
    if bays is None:
        return tuple(told)
    at = last_pass_at(bays)
    if at is not None and is_stale(bays, now, every):
        told.append(f"Old figures: a pass is due every {say_span(every)}, the last was {ago(at, now)}.")
    if bays.watcher is None and bays.drives:
        told.append("Nobody is watching: nothing new will be noticed until diskwatch watch runs.")
    return (*told, *(plain(trouble) for trouble in bays.trouble))


def instead_of_bands(snapshot: Snapshot | None, watching: str) -> str | None:
    """Why there are no bands, and what to do, to stand in their place; None where there are some.

    Args:
        snapshot: what is known; None before the first answer.
        watching: how this screen was opened, one sentence.
    """
    if snapshot is None:
        return "Asking the history for the drives."
    bays = snapshot.bays
    if bays is None:
        return f"The drives cannot be shown: {plain(snapshot.error or '')}"
    if bays.drives:
        return None
    if bays.trouble:
        return f"No drive has been read yet, because of this: {' '.join(plain(text) for text in bays.trouble)}"
    if bays.watcher is None:
        return (
            f"No drive has been read yet, because nobody is watching so far. This screen: {plain(watching)}. "
            "If nothing comes, run diskwatch watch --once to read all drives once, or diskwatch watch to go on "
            "watching; most machines let only root read drives."
        )
    return (
        f"No drive has been read yet, because process {bays.watcher} has not ended its first pass. "
        "Wait a minute; if nothing comes, run diskwatch watch --once to see what it says."
    )


def tells_trouble(snapshot: Snapshot) -> bool:
    """Whether `instead_of_bands` tells the troubles already, so that no notes are needed above it."""
    return snapshot.bays is None or (not snapshot.bays.drives and snapshot.error is None)


def _passes(bays: Bays, now: int, every: int) -> list[Text]:
    at = last_pass_at(bays)
    if at is None:
        return [Text("no pass yet")]
    style = _LOUD if is_stale(bays, now, every) else ""
    return [
        Text(f"last pass {ago(at, now)}", style=style),
        Text(f"last pass {ago(at, now, short=True)}", style=style),
        Text(ago(at, now, short=True), style=style),
    ]


def _joined(parts: list[Text]) -> Text:
    return Text("  ").join(parts)
