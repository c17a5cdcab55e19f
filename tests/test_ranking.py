"""Ranks with limits, first places, shrunken estimates and simultaneous intervals."""

import math

import numpy as np
import pytest
from scipy import stats

from cornerwise.ranking import (
    Estimates,
    first_probabilities,
    rank_intervals,
    shrink,
    simultaneous_quantile,
    strength_ranks,
)


def _apart(values: list[float], u: float | list[float], dof: float = math.inf) -> Estimates:
    """Estimates that share nothing."""
    n = len(values)
    of_each = np.broadcast_to(np.asarray(u, dtype=float), n)
    return Estimates(
        values=np.array(values, dtype=float),
        std_uncertainties=of_each.copy(),
        dofs=np.full(n, dof),
        footprints=[{i: np.array([x])} for i, x in enumerate(of_each)],
    )


def _naive(found: Estimates, confidence: float) -> list[tuple[int, int]]:
    """Holm's step-down pair by pair, by scipy's t distribution."""
    n, limits = len(found.values), []
    for i in range(n):
        p_values = {}
        for j in set(range(n)) - {i}:
            both = []
            for sign in (-1, 1):
                own, other = found.footprints[i], found.footprints[j]
                joint = sum(float(np.sum(own[key] * other[key])) for key in own.keys() & other.keys())
                va, vb = found.std_uncertainties[i] ** 2, found.std_uncertainties[j] ** 2
                v = va + vb + 2 * sign * joint
                nu = v**2 / (va**2 / found.dofs[i] + vb**2 / found.dofs[j])
                if sign * joint > 0:
                    nu = min(nu, found.dofs[i], found.dofs[j])
                t = abs(found.values[i] + sign * found.values[j]) / math.sqrt(v)
                both.append(2 * stats.t.sf(t, nu))
            p_values[j] = max(both)
        shown: set[int] = set()
        for step, j in enumerate(sorted(p_values, key=lambda j: p_values[j])):
            if p_values[j] > (1 - confidence) / (n - 1 - step):
                break
            shown.add(j)
        up = sum(abs(found.values[j]) > abs(found.values[i]) for j in shown)
        limits.append((1 + up, n - (len(shown) - up)))
    return limits


def test_ranks_by_strength() -> None:
    assert strength_ranks([0.1, 3.0, 2.0]) == [3, 1, 2]
    assert strength_ranks([2.0, 3.0, 2.0]) == [2, 1, 3]


def test_clearly_apart_and_not_apart() -> None:
    assert rank_intervals(_apart([0.1, -9.0, 4.0], 0.3), 0.95) == [(3, 3), (1, 1), (2, 2)]
    assert rank_intervals(_apart([1.0, -1.2, 1.1], 0.3), 0.95) == [(1, 3)] * 3
    assert rank_intervals(_apart([1.0], 0.3), 0.95) == [(1, 1)]


def test_opposite_signs_of_equal_size_are_not_apart() -> None:
    # Their difference is 30 standard errors; their sizes are equal.
    assert rank_intervals(_apart([5.0, -5.0], 0.24), 0.95) == [(1, 2), (1, 2)]


def test_two_estimates_at_the_limit_of_their_t_test() -> None:
    limit = stats.t.ppf(0.975, 20) * math.sqrt(2)  # dof of a difference of two with 10 each
    for factor, expected in ((0.999, [(1, 2), (1, 2)]), (1.001, [(1, 1), (2, 2)])):
        found = rank_intervals(_apart([10.0 + limit * factor, 10.0], 1.0, 10.0), 0.95)
        assert found == expected


def test_what_two_share_does_not_separate_them_and_does_not_blur_them() -> None:
    # Errors of 1 in common and 0.1 of their own: a difference of 0.6 is far beyond chance.
    shared = Estimates(
        values=np.array([10.0, 10.6]),
        std_uncertainties=np.full(2, math.hypot(1, 0.1)),
        dofs=np.full(2, math.inf),
        footprints=[{"wt": np.array([1.0]), i: np.array([0.1])} for i in range(2)],
    )
    assert rank_intervals(shared, 0.95) == [(2, 2), (1, 1)]
    assert rank_intervals(_apart([10.0, 10.6], math.hypot(1, 0.1)), 0.95) == [(1, 2), (1, 2)]


@pytest.mark.parametrize("seed", range(5))
def test_against_every_pair_written_out(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = 12
    footprints = [
        {"wt": rng.normal(0, 0.4, 5), ("own", i): rng.normal(0, rng.uniform(0.1, 0.6), 5)} for i in range(n)
    ]
    u = np.array([math.sqrt(sum(float(np.sum(e**2)) for e in one.values())) for one in footprints])
    found = Estimates(
        values=rng.normal(0, 4, n), std_uncertainties=u, dofs=rng.uniform(3, 30, n), footprints=footprints
    )
    for confidence in (0.8, 0.95):
        assert rank_intervals(found, confidence) == _naive(found, confidence)


def test_blocks_of_comparisons_change_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    rng = np.random.default_rng(3)
    found = _apart(list(rng.normal(0, 3, 40)), list(rng.uniform(0.2, 1.0, 40)), 9.0)
    whole = rank_intervals(found, 0.95)
    monkeypatch.setattr("cornerwise.ranking._PAIRS_AT_ONCE", 130)
    assert rank_intervals(found, 0.95) == whole


def test_rank_limits_hold_the_true_ranks() -> None:
    # Two groups of equals and a few between them; limits must hold every rank that equals share.
    rng = np.random.default_rng(5)
    truth = np.array([0.0] * 6 + [2.0, -3.0] + [5.0, -5.0, 5.0])
    above = np.array([1 + np.sum(np.abs(truth) > abs(x)) for x in truth])
    below = np.array([np.sum(np.abs(truth) >= abs(x)) for x in truth])
    held = np.zeros(len(truth))
    for _ in range(400):
        limits = np.array(rank_intervals(_apart(list(truth + rng.normal(0, 0.8, len(truth))), 0.8), 0.95))
        held += (limits[:, 0] <= above) & (below <= limits[:, 1])
    assert (held / 400 >= 0.93).all()  # 0.95 less two standard errors of 400 trials
    assert limits[0, 0] > 1  # and they say something


def test_shrinking_equal_uncertainties_is_james_and_stein() -> None:
    y = np.array([3.0, -2.0, 0.5, 1.5, -4.0, 0.1])
    u = 0.7
    expected = (1 - (len(y) - 2) * u**2 / np.sum(y**2)) * y
    assert shrink(y, np.full(6, u)).values == pytest.approx(expected)


def test_shrinking_nearly_nothing_and_nearly_everything() -> None:
    exact = shrink(np.array([3.0, -2.0, 0.5, 1.5]), np.zeros(4))
    assert exact.values == pytest.approx([3.0, -2.0, 0.5, 1.5])
    noise = shrink(np.array([0.3, -0.2, 0.5, 0.15, 0.1]), np.ones(5))
    assert noise.values == pytest.approx(np.array([0.3, -0.2, 0.5, 0.15, 0.1]) * (1 - 3 / 5))
    few = np.array([3.0, 1.0, 0.2])
    assert np.array_equal(shrink(few, np.ones(3)).values, few)


def test_noisy_estimates_shrink_more() -> None:
    y = np.full(5, 2.0)
    found = shrink(y, np.array([0.1, 0.5, 1.0, 2.0, 4.0]))
    assert (np.diff(found.values) < 0).all()
    assert (found.std_uncertainties > 0).all()


def test_shrunken_estimates_are_closer_to_the_truth() -> None:
    rng = np.random.default_rng(7)
    plain = shrunken = 0.0
    for _ in range(200):
        truth, u = rng.normal(0, 1, 20), rng.uniform(0.3, 1.5, 20)
        y = truth + u * rng.standard_normal(20)
        plain += float(np.mean((y - truth) ** 2))
        shrunken += float(np.mean((shrink(y, u).values - truth) ** 2))
    assert shrunken < 0.7 * plain


def test_first_probabilities_of_equals_and_of_a_clear_first() -> None:
    deviations = np.random.default_rng(1).standard_normal((4, 40_000))
    equal = first_probabilities(np.zeros(4), deviations, np.ones(4), 1)
    assert equal == pytest.approx(0.25, abs=0.01)
    assert equal.sum() == pytest.approx(1.0)
    clear = first_probabilities(np.array([0.0, -9.0, 0.0, 0.0]), deviations, np.ones(4), 1)
    assert clear == pytest.approx([0, 1, 0, 0], abs=1e-3)
    assert first_probabilities(np.zeros(4), deviations, np.ones(4), 4) == pytest.approx(1.0)


def test_first_probability_of_two_normals() -> None:
    # P(|a + x| > |b + y|) with x + y and x - y independent: exact by two normal probabilities.
    a, b = 1.5, 1.0
    deviations = np.random.default_rng(2).standard_normal((2, 200_000))
    plus, minus = stats.norm.cdf((a + b) / math.sqrt(2)), stats.norm.cdf((a - b) / math.sqrt(2))
    exact = plus * minus + (1 - plus) * (1 - minus)
    found = first_probabilities(np.array([a, b]), deviations, np.ones(2), 1)
    assert found[0] == pytest.approx(exact, abs=0.005)


def test_blocks_of_replicates_change_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    deviations = np.random.default_rng(4).standard_normal((6, 999)).astype(np.float32)
    whole = first_probabilities(np.arange(6.0) / 5, deviations, np.ones(6), 2)
    monkeypatch.setattr("cornerwise.ranking._VALUES_AT_ONCE", 100)
    assert np.array_equal(first_probabilities(np.arange(6.0) / 5, deviations, np.ones(6), 2), whole)


def test_simultaneous_quantile_of_independent_errors_is_sidaks() -> None:
    u = np.linspace(0.5, 2.0, 20)
    deviations = u[:, np.newaxis] * np.random.default_rng(6).standard_normal((20, 100_000))
    exact = stats.norm.ppf((1 + 0.95 ** (1 / 20)) / 2)
    assert simultaneous_quantile(deviations, u, 0.95) == pytest.approx(exact, abs=0.03)
    # One error under two names needs no more than one interval does.
    same = np.vstack([deviations[0]] * 5)
    assert simultaneous_quantile(same, np.full(5, u[0]), 0.95) == pytest.approx(1.96, abs=0.03)
    assert simultaneous_quantile(np.zeros((2, 50)), np.zeros(2), 0.95) == pytest.approx(1.959964)
