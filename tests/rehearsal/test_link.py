import csv
import gzip

import pytest

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.link import Bay


def damaged(bay: Bay, days: int, *, moving: bool = True, seed: object = 1):
    rng = stream(1, "link", seed)
    told = [bay.errors(rng, 1.0, moving=moving) for _ in range(days)]
    return [one for one, _ in told], [two for _, two in told]


def test_a_loose_cable_damages_bursts_on_its_share_of_days_until_it_is_mended():
    bay = Bay(name="one", errors_a_year=0.0)
    bay.loosen(bad_days=0.5, burst=20.0, hangs=0.1)
    errors, hung = damaged(bay, 2_000)
    assert sum(one > 0 for one in errors) / 2_000 == pytest.approx(0.5, abs=0.04)
    assert sum(hung) / sum(errors) == pytest.approx(0.1, rel=0.1)
    bay.mend()
    assert sum(damaged(bay, 2_000)[0]) == 0


def test_a_silent_cable_damages_nothing():
    bay = Bay(name="one")
    bay.loosen(bad_days=1.0, burst=20.0, hangs=0.1)
    assert sum(damaged(bay, 50, moving=False)[0]) == 0


def test_sound_cables_have_errors_as_seldom_as_open_drive_data_show(shared):
    # lastday_2019_*.csv.gz, attribute 199 of drives that did not fail: 0.8 to 1.4 % by model.
    rates = []
    for name in ("ST8000DM002", "ST8000NM0055", "HGST_HMS5C4040BLE640"):
        with gzip.open(shared / "drive_series" / f"lastday_2019_{name}.csv.gz", "rt") as lines:
            rows = [row for row in csv.DictReader(lines) if row["failure"] in {"0", "0.0"}]
        told = [float(row["smart_199_raw"]) for row in rows if row["smart_199_raw"]]
        rates.append(sum(value > 0 for value in told) / len(told))
    rng = stream(1, "cables")
    bays = 4_000
    three_years = 3 * 365.25
    share = sum(Bay(name="one").errors(rng, three_years, moving=True)[0] > 0 for _ in range(bays)) / bays
    assert 0.7 * min(rates) <= share <= 1.3 * max(rates)
