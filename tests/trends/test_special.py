"""Reference: scipy, where it is installed; and published percentage points, quoted from memory."""

from math import exp, inf, sqrt

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends import special

CHANCES = (1e-12, 1e-6, 1e-3, 0.025, 0.1, 0.3, 0.5, 0.7, 0.9, 0.975, 0.999, 1 - 1e-6)
SHAPES = (0.1, 0.5, 1.0, 2.5, 7.0, 30.0, 333.3, 1e4)


@pytest.fixture
def scipy():
    return pytest.importorskip("scipy.special", reason="the reference library is not installed")


@pytest.mark.parametrize("chance", CHANCES)
def test_the_normal_distribution_agrees_with_scipy(scipy, chance):
    assert special.normal_quantile(chance) == pytest.approx(scipy.ndtri(chance), rel=1e-12, abs=1e-15)
    assert special.normal_cdf(scipy.ndtri(chance)) == pytest.approx(chance, rel=1e-12)


@pytest.mark.parametrize("shape", SHAPES)
def test_the_gamma_distribution_agrees_with_scipy(scipy, shape):
    for chance in CHANCES:
        upper = scipy.gammainccinv(shape, 1 - chance)
        point = scipy.gammaincinv(shape, chance) if chance < 0.9 else upper
        assert special.gamma_quantile(chance, shape) == pytest.approx(point, rel=1e-9)
        assert special.gamma_lower(shape, point) == pytest.approx(scipy.gammainc(shape, point), rel=1e-9)
        assert special.gamma_upper(shape, point) == pytest.approx(scipy.gammaincc(shape, point), rel=1e-9)


@pytest.mark.parametrize("degrees", SHAPES)
def test_the_t_distribution_agrees_with_scipy(scipy, degrees):
    for chance in CHANCES:
        reference = scipy.stdtrit(degrees, chance)
        assert special.student_quantile(chance, degrees) == pytest.approx(reference, rel=1e-9, abs=1e-12)


@pytest.mark.parametrize("a", SHAPES)
def test_the_beta_distribution_agrees_with_scipy(scipy, a):
    for b in SHAPES:
        for chance in CHANCES:
            point = scipy.betaincinv(a, b, chance)
            if point < 1e-290:
                continue  # no number can hold it
            assert special.beta_quantile(chance, a, b) == pytest.approx(point, rel=1e-9)
            assert special.beta_cdf(point, a, b) == pytest.approx(scipy.betainc(a, b, point), rel=1e-9)


@pytest.mark.parametrize(
    ("found", "printed"),
    [
        (special.normal_quantile(0.975), 1.959964),
        (special.normal_quantile(0.9), 1.281552),
        (2 * special.gamma_quantile(0.95, 5.0), 18.307038),  # chi-square, 10 degrees
        (2 * special.gamma_quantile(0.05, 0.5), 0.003932140),
        (special.student_quantile(0.975, 10), 2.228139),
        (special.student_quantile(0.95, 1), 6.313752),
        # F of 5 and 10 degrees, 95 %.
        (special.beta_prime_quantile(0.95, 2.5, 5.0) * 10 / 5, 3.325835),
    ],
)
def test_the_percentage_points_are_those_of_the_printed_tables(found, printed):
    assert found == pytest.approx(printed, rel=4e-7)


def test_the_repair_times_of_the_nist_handbook_lie_at_their_place_on_the_chi_square_scale():
    """MIL-HDBK statistic 37.2281 with 20 degrees: upper tail 0.010986 (NIST/SEMATECH 8.2.3.4, from memory)."""
    assert special.gamma_upper(10, 37.2280814835 / 2) == pytest.approx(0.0109863571, rel=1e-8)


@pytest.mark.parametrize(
    ("mean", "shape", "time", "chance"),
    [
        (100.0, 400.0, 80.0, 0.4123089560),
        (30.0, 15.0, 10.0, 0.3463798496),
        (1.0, 1.0, 1.0, 0.6681020012),
        (365.0, 50.0, 90.0, 0.5192122457),
        # R = 30 at 12 a year with variance 9 a year: mean 2.5, shape 100, within 2 years.
        (2.5, 100.0, 2.0, 0.0901105),
        # The 10, 50 and 90 % points of the same.
        (2.5, 100.0, 2.01842, 0.1),
        (2.5, 100.0, 2.46920, 0.5),
        (2.5, 100.0, 3.02115, 0.9),
        # Quantiles of drifting Wiener processes.
        (20.0, 100.0, 18.2042838885, 0.5),
        (20.0, 100.0, 9.06601788, 0.05),
        (200.0, 100.0, 710.51920917, 0.95),
    ],
)
def test_the_first_passage_of_a_drifting_wiener_process_follows_from_the_normal_tails(
    mean, shape, time, chance
):
    """Inverse Gaussian by its closed form; values computed with scipy's invgauss, two routes that agree."""
    root = sqrt(shape / time)
    first = special.normal_cdf(root * (time / mean - 1))
    second = exp(2 * shape / mean) * special.normal_cdf(-root * (time / mean + 1))
    assert first + second == pytest.approx(chance, rel=3e-5)


@given(chance=st.floats(1e-9, 1 - 1e-9), a=st.floats(0.2, 200), b=st.floats(0.2, 200))
def test_every_quantile_comes_back_to_its_probability(chance, a, b):
    assert special.gamma_lower(a, special.gamma_quantile(chance, a)) == pytest.approx(chance, rel=1e-8)
    ratio = special.beta_prime_quantile(chance, a, b)
    assert special.beta_prime_cdf(ratio, a, b) == pytest.approx(chance, rel=1e-8)
    assert special.normal_cdf(special.normal_quantile(chance)) == pytest.approx(chance, rel=1e-9)


@given(x=st.integers(0, 2**20).map(lambda k: k / 2**20), a=st.floats(0.2, 200), b=st.floats(0.2, 200))
def test_the_beta_distribution_mirrors_itself_when_its_shapes_are_swapped(x, a, b):
    assert special.beta_cdf(x, a, b) + special.beta_cdf(1 - x, b, a) == pytest.approx(1, abs=1e-9)


@given(chance=st.floats(0.001, 0.999), degrees=st.floats(0.5, 500))
def test_the_t_distribution_is_symmetric(chance, degrees):
    left, right = special.student_quantile(chance, degrees), special.student_quantile(1 - chance, degrees)
    assert left == pytest.approx(-right, rel=1e-9, abs=1e-9)


def test_the_ends_are_exact():
    assert special.gamma_lower(2, 0) == 0
    assert special.gamma_upper(2, 0) == 1
    assert special.gamma_lower(2, inf) == 1
    assert special.beta_cdf(0, 2, 3) == 0
    assert special.beta_cdf(1, 2, 3) == 1
    assert special.beta_prime_cdf(0, 2, 3) == 0
    assert special.beta_prime_cdf(inf, 2, 3) == 1
    assert special.student_quantile(0.5, 3) == 0


@pytest.mark.parametrize(
    "wrong",
    [
        lambda: special.normal_quantile(0),
        lambda: special.normal_quantile(float("nan")),
        lambda: special.gamma_quantile(1, 2),
        lambda: special.gamma_quantile(0.5, 0),
        lambda: special.gamma_lower(-1, 2),
        lambda: special.gamma_lower(1, -2),
        lambda: special.beta_cdf(1.5, 1, 1),
        lambda: special.beta_cdf(0.5, 0, 1),
        lambda: special.beta_prime_cdf(-1, 1, 1),
        lambda: special.beta_quantile(0.5, inf, 1),
        lambda: special.student_quantile(0.5, -1),
    ],
)
def test_what_lies_outside_is_refused(wrong):
    with pytest.raises(ValueError, match="expected"):
        wrong()


def test_parameters_far_beyond_what_is_meant_are_refused_in_place_of_a_wrong_answer():
    with pytest.raises(ArithmeticError, match="did not settle"):
        special.gamma_lower(1e12, 1e12)
