import pytest

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.power import Strip


def test_a_strip_loses_power_as_often_a_year_as_it_is_said_to():
    strip, rng = Strip(name="desk", losses_a_year=40.0), stream(1, "mains")
    assert sum(strip.losses(rng, 1.0) for _ in range(36_525)) / 100 == pytest.approx(40, rel=0.05)
