from diskwatch.judge.warmth_told import hotter


def test_a_drive_that_runs_hotter_is_told_with_its_numbers_and_what_to_do():
    assert hotter(highest=58, usual=38.0, line=50.0, evidence=130_000.0) == (
        "It runs hotter than it used to: up to 58 °C a day, usually 38 °C in its first weeks; the norm ends at "
        "50 °C. A drive within the norm would show this at most once in 350 years of watching: see to its "
        "cooling."
    )
