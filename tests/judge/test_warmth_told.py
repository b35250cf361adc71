from diskwatch.judge.warmth_told import hotter, standing


def test_a_drive_that_runs_hotter_is_told_with_its_numbers_and_what_to_do():
    assert hotter(highest=58, usual=38.0, line=50.0, evidence=130_000.0) == (
        "It runs hotter than it used to: up to 58 °C a day, usually 38 °C in its first weeks; the norm ends at "
        "50 °C. A drive within the norm would show this at most once in 350 years of watching: see to its "
        "cooling."
    )


def test_the_ledger_of_temperature_is_laid_open_and_while_it_is_learnt_too():
    young = standing(usual=None, learnt_days=8, days=None, alarms_at=121_750.0)
    assert young == "What is usual is still being learnt, from 8 of 30 days."
    old = standing(usual=38.0, learnt_days=30, days=5.0, alarms_at=121_750.0)
    assert old == "Usually up to 38 °C a day: once a year or more often, alarms at once in 330 years."
