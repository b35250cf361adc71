import json
from typing import Any

from diskwatch.cli.rehearsed import answer, list_answer, told, told_list
from diskwatch.records import Call, CallWord, Cause
from diskwatch.rehearsal.course import Ended
from diskwatch.rehearsal.scenario import Expectation
from diskwatch.rehearsal.story import Said, Story
from diskwatch.rehearsal.verdict import outcomes
from tests.rehearsal.examples import HDD, hdd, scenario

DAY = 86_400


def said(day: int, word: str, cause: Cause | None, *, changed: bool = True) -> Said:
    call = Call(
        word=CallWord(word),
        at=day * DAY,
        cause=cause,
        cause_probability=None,
        cause_second=None,
        reason=f"of day {day}",
        rule="x",
        evidence=None,
    )
    return Said(at=call.at, call=call, changed=changed)


def ended(*story: Said, expect: tuple[Expectation, ...] = (), days: int = 9) -> Ended:
    what = scenario(hdd(), expect=expect, days=days)
    stories = {HDD: Story(serial=HDD, model="INVENTED", first=0, last=days * DAY, said=list(story))}
    came = outcomes(what, stories, start=0, end=days * DAY)
    return Ended(scenario=what, seed=1, start=0, end=days * DAY, stories=stories, outcomes=came)


def plain_answer(one: dict[str, object]) -> Any:
    """The answer as whoever reads it gets it."""
    return json.loads(json.dumps(one))


def test_a_change_of_cause_under_the_same_call_is_told_to_a_person_and_in_the_answer():
    one = ended(said(0, "keep", None), said(3, "look", Cause.LINK), said(5, "look", Cause.LOAD, changed=False))
    lines = told(one).splitlines()
    assert "  day    3.00  look    of day 3" in lines
    assert "  day    5.00  look    (for load, no longer link) of day 5" in lines
    (change,) = plain_answer(answer(one))["cause_changes"][HDD]
    assert (change["at"], change["before"], change["cause"]) == ("1970-01-06T00:00:00Z", "link", "load")


def test_what_is_expected_twice_for_two_reasons_is_told_once_with_both():
    wishes = tuple(Expectation(drive=HDD, stays=CallWord.KEEP, because=why) for why in ("a", "b", "a"))
    lines = told(ended(said(0, "keep", None), expect=wishes)).splitlines()
    at = next(nth for nth, line in enumerate(lines) if "never more than keep" in line)
    assert [line.strip() for line in lines[at + 1 :]] == ["(a)", "(b)"]
    listed = {"small": scenario(hdd(), expect=wishes)}
    assert [line.strip() for line in told_list(listed).splitlines()[2:]] == ["a", "b"]
    assert len(plain_answer(answer(ended(said(0, "keep", None), expect=wishes)))["expected"]) == 3


def test_one_day_is_no_days():
    assert told(ended(said(0, "keep", None), days=1)).startswith("a test: 1 day in")
    listed = {"small": scenario(hdd(), days=1)}
    assert " 1 day, 1 INVENTED drive in" in told_list(listed)
    assert plain_answer(list_answer(listed))["scenarios"][0]["days"] == 1
