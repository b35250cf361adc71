"""Facts: what a reading says by itself, without any trend.

A fact calls at once, also on the first reading. Everything else on a first reading is a level.
"""

from collections.abc import Iterable, Iterator

from diskwatch.judge import sentences
from diskwatch.judge.language import _, marked
from diskwatch.records import (
    Attribute,
    CallWord,
    Cause,
    DriveWarning,
    Failing,
    Finding,
    FindingKind,
    Reading,
)
from diskwatch.trends.norms import STREAM_OF

WARNINGS = (
    (1, marked("spare blocks below their limit"), Cause.SPARE),
    (2, marked("a temperature outside its limits"), Cause.HEAT),
    (4, marked("degraded reliability"), Cause.MEDIA),
    (8, marked("media that can only be read"), Cause.WEAR_OUT),
    (16, marked("a failed backup of its volatile memory"), Cause.CONTROLLER),
    (32, marked("persistent memory that can only be read"), Cause.WEAR_OUT),
)
"""Bits of the critical warning: NVM Express, SMART / Health log 02h, byte 0 (names ours)."""

_BLAMED: dict[str, Cause] = {
    DriveWarning.ENCLOSURE: Cause.POWER,
    DriveWarning.SELF_TEST: Cause.UNCLEAR,
    DriveWarning.SCAN: Cause.MEDIA,
    DriveWarning.CACHE: Cause.CONTROLLER,
    DriveWarning.POWER: Cause.POWER,
    DriveWarning.STATISTICS: Cause.UNCLEAR,
    DriveWarning.HUMIDITY: Cause.UNCLEAR,
    DriveWarning.FIRMWARE: Cause.CONTROLLER,
    DriveWarning.ELEMENT: Cause.HEAD,
    DriveWarning.UNNAMED: Cause.UNCLEAR,
}
"""What a SCSI drive's warning points to (common practice, no source)."""

_HEAT_ONLY = 2
_WARMTH = frozenset({190, 194})
_WEAR = frozenset({173, 177, 202, 230, 231, 232, 233})
_REPLACEMENT = frozenset({5, 196, 197, 198, 187})


def facts(reading: Reading, *, at: int, first_spare: int | None) -> tuple[Finding, ...]:
    """Every fact that a reading states.

    Args:
        reading: what the pass brought.
        at: when, UTC seconds since 1970.
        first_spare: percentage of spare blocks when the drive was first read, or None.

    Returns:
        Findings of kind FACT, at most one a name.
    """
    return (
        *_verdict(reading, at),
        *_warning(reading, at),
        *_attributes(reading, at),
        *_spare(reading, at),
        *_wear(reading, at, first_spare),
        *_self_tests(reading, at),
        *_heat(reading, at),
    )


def _fact(
    name: str, at: int, calls: CallWord, cause: Cause, sentence: str, *signals: str, **data: object
) -> Finding:
    return Finding(
        name=f"fact:{name}",
        kind=FindingKind.FACT,
        signals=signals,
        since=at,
        calls=calls,
        cause=cause,
        evidence=None,
        sentence=sentence,
        data=data,
    )


def _verdict(reading: Reading, at: int) -> Iterable[Finding]:
    """The drive's own verdict; an NVMe drive that only warns of its temperature is hot, not failing."""
    warning = reading.number("critical-warning") or 0
    failed = reading.get("self-assessment") == "failed"
    if not failed and not warning:
        return ()
    if warning == _HEAT_ONLY:
        return (
            _fact(
                "warns-of-heat", at, CallWord.LOOK, Cause.HEAT, sentences.warns_of_heat(), "critical-warning"
            ),
        )
    meant = [(name, cause) for bit, name, cause in WARNINGS if warning & bit]
    names = ", ".join(_(name) for name, _cause in meant)
    return (
        _fact(
            "self-assessment",
            at,
            CallWord.RETIRE,
            meant[0][1] if meant else _blamed(reading),
            sentences.self_assessment_failed(names, _counted(reading)),
            "self-assessment",
            critical_warning=warning,
        ),
    )


def _warning(reading: Reading, at: int) -> Iterable[Finding]:
    """What a SCSI drive warns of instead of a verdict; a prediction that it tries out is no warning."""
    warning = reading.get("drive-warning")
    if not isinstance(warning, str):
        return ()
    if warning == DriveWarning.TEMPERATURE:
        return (
            _fact("warns-of-heat", at, CallWord.LOOK, Cause.HEAT, sentences.warns_of_heat(), "drive-warning"),
        )
    if warning not in _BLAMED:
        return ()
    return (
        _fact(
            f"warns-of-{warning}",
            at,
            CallWord.LOOK,
            _BLAMED[warning],
            sentences.warns_of(DriveWarning(warning)),
            "drive-warning",
        ),
    )


def _counted(reading: Reading) -> dict[str, int]:
    """Counters of errors that are not at zero, for the sentence."""
    return {signal: count for signal in STREAM_OF if (count := reading.number(signal) or 0) > 0}


def _blamed(reading: Reading) -> Cause:
    """What a failed verdict rests on, as far as the attribute table or the counters tell."""
    for attribute in reading.attributes:
        if attribute.failing is Failing.NOW and attribute.prefail:
            return _cause_of(attribute)
    if (reading.number("grown-defects") or 0) > 0 or (reading.number("uncorrected-reads") or 0) > 0:
        return Cause.MEDIA
    return Cause.UNCLEAR


def _cause_of(attribute: Attribute) -> Cause:
    if attribute.number in _WARMTH:
        return Cause.HEAT
    if attribute.number in _REPLACEMENT:
        return Cause.MEDIA
    if attribute.number in _WEAR:
        return Cause.WEAR_OUT
    return Cause.UNCLEAR


def _attributes(reading: Reading, at: int) -> Iterator[Finding]:
    """Attributes at or below their threshold now.

    Pre-failure ones predict failure; the others say that design life is used up, or that it is hot (field of
    the flags and its meaning: maker's manuals and the query command's manual page).
    """
    for attribute in reading.attributes:
        if attribute.failing is not Failing.NOW:
            continue
        cause = _cause_of(attribute)
        calls = CallWord.RETIRE if attribute.prefail and cause is not Cause.HEAT else CallWord.LOOK
        name = "hot" if cause is Cause.HEAT else f"attribute-{attribute.number}"
        yield _fact(name, at, calls, cause, sentences.failing_attribute(attribute), number=attribute.number)
        if cause is Cause.HEAT:
            return


def _spare(reading: Reading, at: int) -> Iterable[Finding]:
    spare, threshold = reading.number("available-spare"), reading.number("spare-threshold")
    if spare is None or threshold is None or spare >= threshold:
        return ()
    return (
        _fact(
            "spare",
            at,
            CallWord.RETIRE,
            Cause.SPARE,
            sentences.spare_below(spare, threshold),
            "available-spare",
            spare=spare,
            threshold=threshold,
        ),
    )


def _wear(reading: Reading, at: int, first_spare: int | None) -> Iterable[Finding]:
    """Past the rated endurance, which is no failure; together with a falling spare the data should move."""
    used, spare = reading.number("percentage-used"), reading.number("available-spare")
    if used is None or used < 100:
        return ()
    falling = spare is not None and first_spare is not None and spare < first_spare
    return (
        _fact(
            "worn-out" if falling else "worn",
            at,
            CallWord.COPY if falling else CallWord.LOOK,
            Cause.WEAR_OUT,
            sentences.worn(used, spare, falling=falling),
            "percentage-used",
            used=used,
        ),
    )


def _self_tests(reading: Reading, at: int) -> Iterator[Finding]:
    """The newest failed self-test, unless an extended test has passed since."""
    for test in reading.self_tests:
        if test.passed and test.extended:
            return
        if test.passed is False:
            if test.unreadable:
                yield _fact(
                    "self-test-unreadable",
                    at,
                    CallWord.COPY,
                    Cause.MEDIA,
                    sentences.unreadable_in_self_test(test),
                    "self-test",
                    lba=test.lba,
                    hours=test.hours,
                )
            else:
                yield _fact(
                    "self-test-failed",
                    at,
                    CallWord.LOOK,
                    Cause.UNCLEAR,
                    sentences.self_test_failed(test),
                    "self-test",
                    hours=test.hours,
                )
            return


def _heat(reading: Reading, at: int) -> Iterable[Finding]:
    """At or above the drive's own limit; the limit comes from the drive, never from a table of ours."""
    limit = reading.warning_celsius if reading.warning_celsius is not None else reading.critical_celsius
    celsius = reading.number("temperature")
    if limit is None or celsius is None or celsius < limit:
        return ()
    if any(one.failing is Failing.NOW and one.number in _WARMTH for one in reading.attributes):
        return ()
    return (
        _fact(
            "hot",
            at,
            CallWord.LOOK,
            Cause.HEAT,
            sentences.hot(celsius, limit),
            "temperature",
            celsius=celsius,
            limit=limit,
        ),
    )
