import pytest

from diskwatch.trends.robust import theil_sen
from diskwatch.trends.special import normal_cdf, normal_quantile
from tests.trends.oracles import cusum_run_length, information, laplace, siegmund, single_change
from tests.trends.published import NILE, REPAIRS, REPAIRS_END


@pytest.mark.parametrize(
    ("threshold", "sound", "shifted"),
    [(4.0, 167.7, 8.383), (5.0, 465.4, 10.376)],
)
def test_the_run_lengths_of_the_two_sided_cusum_are_those_of_the_tables(threshold, sound, shifted):
    """Brook-Evans chain of 400 states, and the usual tables (from memory: 168 and 8.38, 465 and 10.4)."""
    one_sided = cusum_run_length(0.0, reference=0.5, threshold=threshold)
    assert one_sided / 2 == pytest.approx(sound, abs=0.06)
    up = cusum_run_length(1.0, reference=0.5, threshold=threshold)
    down = cusum_run_length(-1.0, reference=0.5, threshold=threshold)
    assert 1 / (1 / up + 1 / down) == pytest.approx(shifted, abs=0.002)


def test_siegmunds_formula_comes_close():
    """338.09 and 8.3434, where 335.4 and 8.383 are exact."""
    assert siegmund(0.0, reference=0.5, threshold=4.0) == pytest.approx(338.09, abs=0.005)
    assert siegmund(1.0, reference=0.5, threshold=4.0) == pytest.approx(8.3434, abs=5e-5)
    assert cusum_run_length(0.0, reference=0.5, threshold=4.0) == pytest.approx(335.4, abs=0.05)


def test_the_repair_times_have_the_laplace_statistic_of_two_packages():
    """-1.32695 ended by time, lower tail 0.0922627; -1.91096 ended by the last."""
    by_time = laplace(REPAIRS, REPAIRS_END)
    assert by_time == pytest.approx(-1.3269491827, abs=1e-9)
    assert normal_cdf(by_time) == pytest.approx(0.0922627467, abs=1e-9)
    assert laplace(REPAIRS[:-1], REPAIRS[-1]) == pytest.approx(-1.91096, abs=5e-6)


def test_the_nile_changes_once_after_twenty_eight_years():
    """After 1898, from a mean of 1097.75 to 849.972 (ruptures; and the literature, from memory)."""
    change = single_change(NILE)
    assert change == 28
    assert sum(NILE[:change]) / change == pytest.approx(1097.75)
    assert sum(NILE[change:]) / (100 - change) == pytest.approx(849.972, abs=5e-4)
    # What a slope over all of it makes of the step.
    assert theil_sen(range(100), NILE).slope < 0


@pytest.mark.parametrize(("ratio", "told"), [(3, 0.65), (10, 7.0), (30, 36.5), (100, 181)])
def test_how_much_a_year_tells_is_what_the_study_says(ratio, told):
    assert information(ratio, 0.5) == pytest.approx(told, rel=0.01)


def test_wilsons_limits_of_twelve_in_three_hundred_follow_from_the_normal_quantile():
    """80 %: 0.027830 to 0.057179 (scipy)."""
    z, share, tries = normal_quantile(0.9), 12 / 300, 300
    middle = (share + z * z / (2 * tries)) / (1 + z * z / tries)
    half = z * ((share * (1 - share) + z * z / (4 * tries)) / tries) ** 0.5 / (1 + z * z / tries)
    assert (middle - half, middle + half) == pytest.approx((0.027830, 0.057179), abs=5e-7)
