"""Every rule by which a finding asks for a call: its name, its version, what it calls, what it rests on.

A call names the finding that led to it; this is the table to look it up in. A rule's version changes with what
it does, so that a call of last year can be checked by the rule of last year.
"""

from collections.abc import Iterable
from dataclasses import dataclass

from diskwatch.judge.language import _, marked
from diskwatch.records import CallWord

_PRACTICE = marked("common practice, no source")
_HOUSE = marked("a rule of the house")
_DRIVE = marked("the drive's own statement, by its standard")
_LEDGER = marked("the evidence ledger; norms are field practice, no source")
_OPEN_DATA = marked("chosen and tested on separate drives of the open daily drive data of 2013")
_KERNEL = marked("the operating system's own log and file systems; common practice, no source")


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One rule.

    Attributes:
        name: of the findings that it is about; one that ends in a hyphen stands for all that begin so.
        version: of this rule, counted from 1.
        calls: every call that it may ask for.
        when: what must show.
        source: what it rests on.
        stated: whether the drive itself states it at every reading, so that no word can end it for long.
    """

    name: str
    version: int
    calls: frozenset[CallWord]
    when: str
    source: str
    stated: bool


_STATED = frozenset({"fact:worn", "fact:worn-out", "fact:self-test-unreadable", "fact:self-test-failed"})
"""Beside what stands in the drive's own verdicts and limits."""


def _rule(name: str, calls: CallWord | Iterable[CallWord], when: str, source: str, *, version: int = 1) -> Rule:
    words = frozenset({calls} if isinstance(calls, CallWord) else calls)
    stated = source == _DRIVE or name in _STATED
    return Rule(name=name, version=version, calls=words, when=when, source=source, stated=stated)


_LOOK, _COPY, _RETIRE = CallWord.LOOK, CallWord.COPY, CallWord.RETIRE

RULES: tuple[Rule, ...] = (
    _rule("quiet", CallWord.KEEP, marked("nothing that stands asks for a deed"), _HOUSE),
    _rule(
        "fact:self-assessment",
        _RETIRE,
        marked("the drive says that it is failing, or warns of spare, reliability, read-only media or backup"),
        _DRIVE,
    ),
    _rule(
        "fact:attribute-",
        (_LOOK, _RETIRE),
        marked(
            "an attribute is at its threshold now: one that predicts failure retires, one of design life looks"
        ),
        _DRIVE,
    ),
    _rule("fact:spare", _RETIRE, marked("spare blocks are below the drive's own limit"), _DRIVE),
    _rule("rule:damage-retire", _RETIRE, marked("the damage measure is 11 or more"), _OPEN_DATA),
    _rule("rule:damage-copy", _COPY, marked("the damage measure is 7 or more"), _OPEN_DATA),
    _rule("fact:self-test-unreadable", _COPY, marked("a self-test met an unreadable sector"), _PRACTICE),
    _rule(
        "fact:worn-out",
        _COPY,
        marked("the rated endurance is used up and the spare blocks are falling"),
        _PRACTICE,
    ),
    _rule("fact:worn", _LOOK, marked("the rated endurance is used up"), _PRACTICE),
    _rule("fact:self-test-failed", _LOOK, marked("a self-test ended with a failure"), _PRACTICE),
    _rule(
        "fact:hot", _LOOK, marked("it is at or above its own temperature limit, or was within 3 days"), _DRIVE
    ),
    _rule("fact:warns-of-heat", _LOOK, marked("it warns of its temperature, or did within 3 days"), _DRIVE),
    _rule("fact:warns-of-", _LOOK, marked("it warns of something, and does not call itself failing"), _DRIVE),
    _rule("fact:unreadable", _LOOK, marked("three passes in a row brought no reading"), _HOUSE),
    _rule(
        "fact:comes-and-goes",
        _LOOK,
        marked("it was gone and came back more than once within 30 days, or once since it last stood"),
        _HOUSE,
    ),
    _rule(
        "fact:first-defect",
        _LOOK,
        marked("a defect counter stands above what it was when first read, or at the owner's last word"),
        _OPEN_DATA,
        version=2,
    ),
    _rule(
        "fact:link-again",
        _LOOK,
        marked("a transfer was damaged within 30 powered days of the owner's word about the link"),
        _HOUSE,
    ),
    _rule(
        "fact:power-shared",
        _LOOK,
        marked("heads retract in an emergency on the days on which power goes away on other drives"),
        _HOUSE,
    ),
    _rule("fact:unreadable-sector", _LOOK, marked("a read of a known sector was given up"), _KERNEL),
    _rule("fact:failed-writes", _LOOK, marked("a write was given up"), _KERNEL),
    _rule(
        "fact:dropped-out", _LOOK, marked("the kernel gave the drive up, or its controller stopped"), _KERNEL
    ),
    _rule(
        "fact:array-", _LOOK, marked("an array runs without one of its drives, or dropped this one"), _KERNEL
    ),
    _rule("fact:file-system", _LOOK, marked("a file system on the drive met an error"), _KERNEL),
    _rule(
        "drift:temperature",
        _LOOK,
        marked(
            "the ledger's evidence has reached its threshold; over 14 days after it last did, once none is left"
        ),
        _LEDGER,
        version=2,
    ),
    _rule("drift:", _LOOK, marked("a ledger's evidence has reached its threshold"), _LEDGER),
    _rule("level:", (), marked("worth knowing; it asks for nothing"), _HOUSE),
)
"""The first that fits a finding's name is its rule."""


def rule_of(name: str) -> Rule:
    """The rule by which a finding asks for a call.

    Args:
        name: the finding's, or ``quiet``.

    Raises:
        KeyError: no rule fits.
    """
    for rule in RULES:
        if name == rule.name or (rule.name[-1] in "-:" and name.startswith(rule.name)):
            return rule
    raise KeyError(name)


def told(name: str) -> str:
    """The rule of a finding for a person: the finding's name, the rule's version, when it holds, its source."""
    rule = rule_of(name)
    return _("{rule}: {when} ({source}).").format(
        rule=f"{name}/{rule.version}", when=_(rule.when), source=_(rule.source)
    )
