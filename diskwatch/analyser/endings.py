"""Findings that end on evidence; all others end on the owner's word alone, or with what they tell of."""

from collections.abc import Iterator
from dataclasses import replace

from diskwatch.analyser import heat
from diskwatch.analyser.findings import DEFECTS
from diskwatch.analyser.outcomes import entry
from diskwatch.analyser.state import DriveState
from diskwatch.judge import rules, sentences
from diskwatch.records import Entry, Finding, Pass
from diskwatch.trends import episodes, slowness
from diskwatch.trends.norms import MAY_FALL
from diskwatch.units import day_number


def ended(state: DriveState, pass_: Pass) -> tuple[DriveState, tuple[Entry, ...]]:
    """Take away what has been shown to be over.

    A link is taken for mended after `rules.LINK_QUIET` powered days without a damaged transfer; its ledger then
    begins anew. A sector that could not be read is over when it has been rewritten and `rules.PENDING_QUIET`
    days brought no new defect of any kind: a sector that was replaced stays a defect. A drive that ran hotter
    than it used to has cooled down when the days since took all evidence of it away again.

    Args:
        state: the drive after a reading, with all that it shows.
        pass_: the pass that brought it.

    Returns:
        The state without what has ended, and an entry for each.
    """
    over = {one.name: sentence for one in state.standing.values() for sentence in _over(state, one, pass_)}
    if not over:
        return state, ()
    day = day_number(pass_.at)
    streams = state.streams
    if not rules.OF_THE_LINK.isdisjoint(over):
        streams = {**streams, "link": episodes.begin(day)}
    left = {name: one for name, one in state.standing.items() if name not in over}
    told = tuple(entry(pass_, "ended", sentence, finding=name) for name, sentence in over.items())
    rose = {stream: when for stream, when in state.rose.items() if streams[stream] is state.streams[stream]}
    return replace(state, standing=left, streams=streams, rose=rose), told


def _over(state: DriveState, finding: Finding, pass_: Pass) -> Iterator[str]:
    if finding.name in rules.OF_THE_LINK:
        stream = state.streams["link"]
        # A state of an older version does not know when its link rose last: the next rise tells.
        last_rise = state.rose.get("link", stream.powered)
        quiet = stream.powered + stream.exposure - last_rise
        if quiet >= rules.LINK_QUIET:
            yield sentences.link_is_quiet(int(quiet))
    elif finding.name == heat.NAME:
        last = finding.data.get("last_day")
        # A finding of an older version does not know when its evidence last stood: it did when it began.
        cool = day_number(pass_.at) - (last if isinstance(last, int) else day_number(finding.since))
        if cool >= rules.COOL and state.temperature.ledger.evidence <= slowness.NOTHING:
            yield sentences.cool_again(cool)
    elif finding.name == "fact:first-defect" and MAY_FALL.issuperset(finding.signals):
        since = {**state.firsts, **state.base}
        rewritten = all(state.latest[signal] <= since[signal] for signal in finding.signals)
        last = max((state.risen[signal] for signal in DEFECTS if signal in state.risen), default=0)
        quiet_days = day_number(pass_.at) - last
        if rewritten and quiet_days >= rules.PENDING_QUIET:
            yield sentences.pending_is_over(quiet_days)
