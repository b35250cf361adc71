from dataclasses import replace

import pytest

from diskwatch.dashboard.rates import traffic
from tests.dashboard.drives import span


def test_traffic_is_told_from_full_to_short():
    # 120 reads in 10 s = 12/s; 42 MB in 10 s = 4.2 MB/s; 744 ms over 120 reads = 6.2 ms.
    assert traffic(
        span(
            reads=120,
            writes=30,
            read_bytes=42_000_000,
            write_bytes=900_000,
            read_ms=744,
            write_ms=60,
            busy_ms=1_600,
        )
    ) == (
        "reads 12/s 4.2 MB/s 6.2 ms  writes 3/s 90 kB/s 2 ms  busy 16 % of the time",
        "reads 12/s 4.2 MB/s 6.2 ms  writes 3/s 90 kB/s",
        "reads 12/s 4.2 MB/s 6.2 ms  writes 3/s",
        "reads 12/s 6.2 ms  writes 3/s",
        "reads 12/s 6.2 ms",
    )


def test_a_drive_that_is_only_written_says_so():
    assert traffic(span(writes=5, write_bytes=20_480))[1] == "no reads  writes 0.5/s 2 kB/s"
    assert traffic(span(writes=5, write_bytes=20_480))[-1] == "writes 0.5/s"


def test_a_drive_at_rest_has_no_traffic():
    assert traffic(span()) == ("no traffic",)


def test_traffic_that_nobody_measures_is_not_called_none():
    assert traffic(None)[0] == "traffic not measured"


def test_a_span_without_length_gives_no_rate():
    assert traffic(replace(span(reads=1), seconds=0.0)) == ("traffic not known yet",)


@pytest.mark.parametrize(
    ("reads", "told"),
    [(1, "0.1/s"), (99, "9.9/s"), (100, "10/s"), (12_430, "1,243/s")],
)
def test_small_rates_have_a_decimal_and_large_ones_do_not(reads, told):
    assert traffic(span(reads=reads))[-1].split()[1] == told


def test_a_rate_that_would_round_to_nothing_is_not_told_as_nothing():
    slow = replace(span(reads=1, read_ms=1), seconds=600.0)
    assert traffic(slow)[-1].startswith("reads <0.1/s")


def test_the_share_of_busy_time_stays_within_the_whole():
    # Requests still under way at the start of a span can make the kernel count more than the span.
    assert traffic(span(reads=1, busy_ms=10_400))[0].endswith("busy 100 % of the time")
