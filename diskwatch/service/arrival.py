"""Pasts of drives that come from another machine: recognised, taken in, judged anew by the same analyser."""

from collections import deque
from collections.abc import Iterable, Sequence
from contextlib import suppress
from dataclasses import dataclass, replace

from diskwatch import analyser
from diskwatch.errors import HistoryTooNew
from diskwatch.history.arriving import Described, described
from diskwatch.history.exchange import Line
from diskwatch.history.judgement import WEEK
from diskwatch.history.moments import Dated
from diskwatch.history.moving import Case, Judged, Part, Said
from diskwatch.history.writer import History
from diskwatch.machine import identity
from diskwatch.records import DriveRound, Entry, KnownDrive, Outcome, Pass, ProbeDay
from diskwatch.units import plain, say_count


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """What came of it, for a person.

    Attributes:
        done: one sentence a drive.
        wrong: what is wrong with rows that were left out.
    """

    done: tuple[str, ...]
    wrong: tuple[str, ...]


def take_in(history: History, lines: Sequence[Line], at: int) -> Told:
    """Take in all drives of a file, wholly or not at all.

    Args:
        history: where to.
        lines: the file's rows.
        at: now, UTC seconds since 1970.

    Raises:
        HistoryError: nothing of it could be stored.
    """
    by_drive: dict[int, list[Line]] = {}
    for line in lines:
        by_drive.setdefault(line.drive, []).append(line)
    free = list(history.known())
    parts: list[Part] = []
    wrong: list[str] = []
    for number, rows in by_drive.items():
        found, why = _described(rows)
        wrong += why
        if found is None:
            wrong.append(
                f"all {say_count(len(rows))} rows of drive {number} are left out: no row says who it is"
            )
            continue
        known = identity.recognise(found.drive.identity, free)
        free = [one for one in free if one is not known]
        rest = [line for line in rows if line.record != "drive"]
        parts.append(Part(known=known, described=found, lines=rest))
    arrived = history.arrive(parts, judged)
    done = tuple(_sentence(part, len(one.wrong)) for part, one in zip(parts, arrived, strict=True))
    if done:
        history.note(*(Entry(at=at, drive=None, kind="watch", text=sentence) for sentence in done))
    return Told(done=done, wrong=(*wrong, *(why for one in arrived for why in one.wrong)))


def _described(rows: Sequence[Line]) -> tuple[Described | None, list[str]]:
    wrong: list[str] = []
    for line in rows:
        if line.record == "drive":
            try:
                return described(line), wrong
            except ValueError as error:
                wrong.append(f"row {line.number} is left out: {plain(str(error))}")
    return None, wrong


def _sentence(part: Part, left_out: int) -> str:
    who = part.described.drive.identity
    name = plain(who.serial or who.wwn or who.model or part.described.place.device)
    taken = say_count(len(part.lines) - left_out)
    what = "a drive that is new here" if part.known is None else "added to what is known of it"
    return f"The past of {name} was taken in: {taken} rows, {what}."


def judged(case: Case) -> Judged | None:
    """What is thought of a drive whose past has become another.

    The state is worked out from the newest dated one that no pass of the other side reaches back behind, so
    that what was exact stays exact.
    """
    if case.arrived.new_from is None:
        return None
    new, own = case.arrived.new_from, case.arrived.own_from
    here = (one for one in case.copies if one.at < new)
    return _from_the_newest(case, (*here, *(one for one in case.arrived.states if own is None or one.at < own)))


def reworked(case: Case) -> Judged | None:
    """What is thought of a drive whose present state was lost: by the newest dated one and the passes since."""
    return _from_the_newest(case, case.copies)


def _from_the_newest(case: Case, states: Iterable[Dated]) -> Judged | None:
    for dated in sorted(states, reverse=True):
        # One that a newer version wrote, or that is no state at all, is no beginning.
        with suppress(ValueError, HistoryTooNew):
            return _from(case, dated, analyser.load(dated.state))
    return _from(case, None, analyser.start())


def _from(case: Case, since: Dated | None, state: analyser.DriveState) -> Judged | None:
    copies: list[Dated] = []
    outcome = state.outcome
    turn, last = (0, None) if since is None else (since.turn, since.at)
    words, probes = deque(case.words), deque(case.probes(last))
    for now, told in case.passes(since):
        state = _settled(state, words, told.at)
        if last is not None and last // WEEK != told.at // WEEK:
            copies.append(Dated(turn=turn, at=last, state=analyser.dump(state)))
        state = _probed(state, probes, case.known, told.at)
        state = analyser.advance(state, replace(told, drive=case.known.drive)).state
        turn, last, outcome = now, told.at, told.outcome
    if last is None:
        return None
    part = standing(case.known, _settled(state, words, None), last, outcome)
    return Judged(part=part, since=since, copies=tuple(copies), anew=since is None)


def standing(known: KnownDrive, state: analyser.DriveState, at: int, outcome: Outcome | None) -> DriveRound:
    """What is thought of a drive by its state, without a pass that led to it.

    Args:
        known: the drive.
        state: its state.
        at: time of its last pass, UTC seconds since 1970.
        outcome: how that pass went, or None.
    """
    step = analyser.Step(state=state, happened=())
    return DriveRound(
        known=known,
        pass_=Pass(at=at, outcome=outcome or Outcome.READ),
        state=analyser.dump(state),
        findings=step.findings,
        evidence=step.evidence,
        call=step.call,
    )


def thought_of(known: KnownDrive, kept: str | None) -> DriveRound:
    """What is thought of a drive by its state as text; the drive alone where there is none that can be read."""
    if kept is not None:
        with suppress(ValueError, HistoryTooNew):
            state = analyser.load(kept)
            at = known.first_seen if state.last_at is None else state.last_at
            return standing(known, state, at, state.outcome)
    return DriveRound(known=known, pass_=Pass(at=known.first_seen, outcome=Outcome.READ), state=None)


def refuse_no_state(text: str) -> None:
    """Raise ValueError for a text that is no state; one that a newer version wrote is not ours to judge."""
    with suppress(HistoryTooNew):
        analyser.load(text)


def _probed(
    state: analyser.DriveState, probes: deque[ProbeDay], known: KnownDrive, until: int
) -> analyser.DriveState:
    """The state after the probes before a pass: a pass follows each of them at once."""
    rpm = known.drive.rotation_rpm
    while probes and probes[0].at <= until:
        day = probes.popleft()
        if rpm is not None and rpm > 0:
            state = analyser.take_in_probe(state, day, rotation_rpm=rpm).state
    return state


def _settled(state: analyser.DriveState, words: deque[Said], until: int | None) -> analyser.DriveState:
    """The state after the owner's words before a pass (None: all), but for those that it knows already."""
    while words and (until is None or words[0].before(until)):
        word = words.popleft().word
        heard = state.word is not None and state.word.at >= word.at
        if state.last_at is not None and not heard:
            state = analyser.settle(state, word).state
    return state
