from diskwatch.records import Margin


def test_a_margin_is_known_as_soon_as_it_has_a_lower_end():
    assert Margin(low=0.0, high=0.0, probability=0.8, signal="percentage-used", limit=100).known
    assert Margin(low=12.0, probability=0.8, signal="percentage-used", limit=100).known
    assert not Margin(reason="too few steps so far").known
