import pytest

from diskwatch.history.keeping import DETAIL_COPIES, DETAIL_DAYS, Daily, daily
from diskwatch.machine import meanings
from diskwatch.trends.norms import NORMS


@pytest.mark.parametrize("signal", [signal for norm in NORMS for signal in norm.signals])
def test_what_a_ledger_follows_is_kept_for_ever(signal):
    assert daily(signal, "count", "events") is None
    assert daily(signal, "gauge", "sectors") is None


@pytest.mark.parametrize(
    ("signal", "kind", "unit", "kept"),
    [
        ("power-on-hours", "time", "hours", Daily.LAST),
        ("temperature", "gauge", "celsius", Daily.HIGHEST),
        ("data-written", "count", "bytes", Daily.LAST),
        ("raw-read-error-rate", "gauge", "opaque", Daily.LAST),
        ("warning-temperature-minutes", "count", "minutes", Daily.LAST),
        ("light-throttling-seconds", "count", "seconds", Daily.LAST),
        ("read-operations", "gauge", "operations", Daily.LAST),
        ("percentage-used", "wear", "percent", None),
        ("self-assessment", "word", "word", None),
        ("read-latency", None, None, None),
    ],
)
def test_what_moves_all_the_time_is_kept_once_a_day_and_what_does_not_is_kept(signal, kind, unit, kept):
    assert daily(signal, kind, unit) is kept


def test_every_error_and_event_count_of_every_kind_of_drive_is_kept():
    counted = [
        one for one in (*meanings.NVME, *meanings.SCSI) if one.unit in {"errors", "sectors", "percent", "bits"}
    ]
    assert len(counted) > 6
    assert [one.signal for one in counted if daily(one.signal, one.kind.value, one.unit)] == []


def test_the_copies_cover_the_days():
    assert DETAIL_COPIES * 7 >= DETAIL_DAYS
