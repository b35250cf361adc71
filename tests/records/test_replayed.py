from diskwatch.records import Call, CallWord, ReplayedDrive, summed
from tests.samples import DAY

NOTHING = {"cause": None, "cause_probability": None, "cause_second": None, "evidence": None}


def drive(serial, *words, failed=False):
    calls = tuple(Call(word=word, at=at * DAY, reason="", rule="", **NOTHING) for at, word in words)
    return ReplayedDrive(
        serial=serial, model=None, first=0, last=30 * DAY, failed=failed, rows=31, calls=calls, drifts=()
    )


def test_the_first_copy_or_retire_warns_and_a_look_does_not():
    life = drive("A", (0, CallWord.KEEP), (5, CallWord.LOOK), (9, CallWord.COPY), (12, CallWord.RETIRE))
    assert life.warned_at == 9 * DAY
    assert life.worst is CallWord.RETIRE
    assert drive("B", (5, CallWord.LOOK)).warned_at is None


def test_leads_count_failed_drives_only():
    summary = summed(
        [
            drive("A", (10, CallWord.COPY), failed=True),
            drive("B", (20, CallWord.RETIRE), failed=True),
            drive("C", (1, CallWord.COPY)),
            drive("D", failed=True),
        ],
        skipped=3,
    )
    assert (summary.failed, summary.warned_failed, summary.warned_sound) == (3, 2, 1)
    assert (summary.median_lead_days, summary.drive_days, summary.skipped) == (15, 124, 3)
