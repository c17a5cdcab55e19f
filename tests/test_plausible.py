"""What no recording can be, and whether a curve rises."""

from itertools import pairwise

import numpy as np
import pytest

from cornerwise import plausible
from cornerwise.plausible import direction, flat_chance, level_probabilities, midranks

VOLTAGES = np.arange(-140.0, 61.0, 10.0)


def sigmoid(midpoint_mv: float = -40.0, slope_mv: float = 9.0) -> np.ndarray:
    return np.asarray(1 / (1 + np.exp(-(VOLTAGES - midpoint_mv) / slope_mv)))


@pytest.mark.parametrize(
    ("charge", "possible"), [(0, False), (1e-9, True), (100, True), (100.01, False), (-13, False)]
)
def test_total_charges(charge: float, possible: bool) -> None:
    assert plausible.possible_total_charge(charge) is possible


@pytest.mark.parametrize(("width", "narrow"), [(4.9, True), (5.0, True), (5.1, False)])
def test_narrow_ranges(width: float, narrow: bool) -> None:
    assert plausible.too_narrow(np.array([0.0, 1.0, width])) is narrow


@pytest.mark.parametrize("midpoint", [-150.0, -100.0, -40.0, 20.0, 80.0])
@pytest.mark.parametrize("noise", [0.0, 0.02, 0.05])
def test_a_curve_that_rises(midpoint: float, noise: float) -> None:
    generator = np.random.default_rng(5)
    curve = sigmoid(midpoint)
    scatter = noise * np.ptp(curve)
    for _ in range(50):
        noisy = curve + generator.normal(0, scatter, len(curve))
        assert direction(noisy) == "rises"
        assert direction(-noisy) == "falls"


@pytest.mark.parametrize(("points", "noise"), [(5, 0.03), (8, 0.1), (12, 0.2), (21, 0.3)])
def test_a_noisy_curve_that_rises_is_seldom_refused(points: int, noise: float) -> None:
    generator = np.random.default_rng(6)
    curve = 1 / (1 + np.exp(-(np.linspace(-140, 60, points) + 40) / 9))
    found = [direction(curve + generator.normal(0, noise, points)) for _ in range(300)]
    assert found.count("rises") >= 294


@pytest.mark.parametrize(
    "curve",
    [
        [0, 0, 0, 0, 1],
        [0, 1, 1, 1, 1],
        [0, 0, 1, 1, 1],
        [1, 2, 3, 4, 5],
        [-5, -4, -3, -2, -1],
        [0.02, -0.01, 0.5, 1.01, 0.99],
    ],
)
def test_short_curves_that_rise(curve: list[float]) -> None:
    assert direction(np.array(curve, dtype=float)) == "rises"
    assert direction(-np.array(curve, dtype=float)) == "falls"


def test_a_late_rise_after_a_long_noisy_plateau() -> None:
    generator = np.random.default_rng(7)
    curve = generator.normal(0, 0.01, 40)
    curve[-2:] += [0.5, 1.0]
    assert direction(curve) == "rises"


def test_a_sag_at_the_top_does_not_make_a_curve_fall() -> None:
    curve = sigmoid(-80.0)
    curve[-8:] -= np.linspace(0, 0.3, 8)
    assert direction(curve) == "rises"


def test_one_wild_point_does_not_refuse_a_curve() -> None:
    for place in range(len(VOLTAGES)):
        for size in (-20.0, 20.0):
            curve = sigmoid()
            curve[place] += size
            assert direction(curve) == "rises", (place, size)


@pytest.mark.parametrize("level", [0.0, 1.0, -3.0, 1e6])
def test_constants_are_flat(level: float) -> None:
    assert direction(np.full(9, level)) == "flat"
    assert direction(np.full(9, level) + level * 1e-12 * np.arange(9)) == "flat"


@pytest.mark.parametrize("points", [5, 10, 30])
def test_noise_about_a_constant_seldom_passes(points: int) -> None:
    generator = np.random.default_rng(8)
    passed = [direction(generator.normal(3, 0.1, points)) for _ in range(1000)].count("rises")
    assert passed <= 100


def test_offset_and_scale_do_not_matter() -> None:
    generator = np.random.default_rng(9)
    for _ in range(100):
        curve = sigmoid() * generator.uniform(0, 0.5) + generator.normal(0, 0.2, len(VOLTAGES))
        assert direction(curve) == direction(curve * 64.0) == direction(curve + 4.0)


@pytest.mark.parametrize("n", [2, 3, 5, 12])
def test_level_probabilities_are_those_of_cycles_in_a_permutation(n: int) -> None:
    """The generating function z (z + 1) ... (z + n - 1) / n!, multiplied out."""
    polynomial = np.array([1.0])
    for k in range(n):
        polynomial = np.convolve(polynomial, [1.0, k])
    factorial = float(np.prod(np.arange(1, n + 1)))
    assert level_probabilities(n) == pytest.approx(polynomial[:-1][::-1] / factorial, rel=1e-12)


def test_the_chance_of_a_perfect_rise_is_one_ordering_in_all() -> None:
    assert flat_chance(1.0, 5) == pytest.approx(1 / 120)
    assert flat_chance(0.0, 5) == 1.0


@pytest.mark.parametrize("n", [5, 8, 11])
def test_flat_chance_is_what_simulation_gives(n: int) -> None:
    generator = np.random.default_rng(10)
    shares = []
    for _ in range(2000):
        noise = generator.normal(size=n)
        noise -= noise.mean()
        shares.append(1 - np.sum((noise - isotonic(noise)) ** 2) / np.sum(noise**2))
    for share in (0.1, 0.3, 0.6):
        rate, chance = float(np.mean(np.array(shares) >= share)), flat_chance(share, n)
        assert abs(rate - chance) < 4 * np.sqrt(chance * (1 - chance) / len(shares)) + 1e-3


def isotonic(values: np.ndarray) -> np.ndarray:
    """Max-min formula of the isotonic regression, written out: an independent implementation."""
    n = len(values)
    return np.array(
        [
            max(min(values[s : t + 1].mean() for t in range(place, n)) for s in range(place + 1))
            for place in range(n)
        ]
    )


def test_chances_fall_with_the_share_and_are_chances() -> None:
    for n in (5, 30, 800):
        chances = [flat_chance(share, n) for share in np.linspace(0, 1, 21)]
        assert all(0 <= after <= before <= 1 for before, after in pairwise(chances))


def test_midranks() -> None:
    assert midranks(np.array([3.0, 1.0, 3.0, -2.0])).tolist() == [3.5, 2.0, 3.5, 1.0]
