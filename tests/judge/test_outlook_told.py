from diskwatch.judge import outlook_told as told
from diskwatch.judge.outlook import FreshTrouble, LimitAhead
from diskwatch.records import Forecast


def limit(low, high, *, least, most):
    forecast = Forecast(
        signal="percentage-used",
        limit=100,
        made_on_day=20_000,
        low=low,
        high=high,
        probability=0.8,
        reason=None,
    )
    return told.limit_told(LimitAhead(forecast=forecast, low=least, high=most))


def fresh(*, under_way, count):
    return told.fresh_told(
        FreshTrouble(stream="media", chance=0.2846, under_way=under_way, episodes=count, powered_days=400.0)
    )


def test_a_limit_is_told_with_its_interval_and_as_much_of_its_chance_as_is_known():
    assert "10 % at most" in limit(800, 2000, least=0.0, most=0.1)
    assert "90 % at least" in limit(100, 700, least=0.9, most=1.0)
    assert "10 to 90 %, which is all that can be said" in limit(100, None, least=0.1, most=0.9)
    assert limit(0, 0, least=1.0, most=1.0) == "Percentage used: its limit of 100 is reached."


def test_fresh_trouble_is_told_with_what_it_was_worked_out_from():
    quiet = fresh(under_way=False, count=0)
    assert (
        quiet == "New bad spots turned up, at least once: 28 %, after 0 occasions in 13 months of powered time."
    )
    assert "at least" in fresh(under_way=True, count=5)


def test_no_chance_of_failure_is_given_and_it_is_said_why():
    assert "not known" in told.failure_unknown()
    assert "30 days" in told.failure_unknown()
    assert "model" in told.source()
    assert told.limit_unknown("available-spare", "it does not fall") == (
        "Available spare: when its limit is reached is not known: it does not fall."
    )
