import numpy as np
import pytest
from scipy import special, stats

from cornerwise.planning.points import FEW, MANY, mean_squares, t_quantiles


@pytest.mark.parametrize("level", [0.9, 0.95, 0.975, 0.995])
def test_the_table_of_t_is_right_to_a_millionth(level: float) -> None:
    dofs = np.concatenate([np.linspace(0.3, 40.0, 997), [1e3, 1e6, np.inf]])
    exact = np.where(np.isinf(dofs), special.ndtri(level), special.stdtrit(dofs, level))
    assert t_quantiles(level, dofs) == pytest.approx(exact, rel=1e-6)


def test_a_few_quantiles_are_computed_each_by_itself() -> None:
    dofs = np.array([0.4, 1.0, 3.7, np.inf])
    exact = [stats.t.ppf(0.99, dof) for dof in dofs[:3]] + [stats.norm.ppf(0.99)]
    assert t_quantiles(0.99, dofs) == pytest.approx(exact, rel=1e-9)
    many = t_quantiles(0.99, np.tile(dofs, 100))
    assert many == pytest.approx(np.tile(exact, 100), rel=1e-6)


@pytest.mark.parametrize("dof", [1.0, 2.0, 4.5, 30.0])
def test_mean_squares_have_the_distribution_of_chi_square(dof: float) -> None:
    found = mean_squares(dof, 3, MANY)
    middles = (np.arange(MANY) + 0.5) / MANY
    assert np.sort(found) == pytest.approx(stats.chi2.ppf(middles, dof) / dof)
    assert found.mean() == pytest.approx(1.0, abs=2e-3)


def test_what_is_known_does_not_scatter() -> None:
    assert (mean_squares(np.inf, 0, FEW) == 1).all()


@pytest.mark.parametrize(("points", "most"), [(FEW, 0.08), (MANY, 0.02)])
def test_dimensions_are_spread_evenly_against_each_other(points: int, most: float) -> None:
    ranks = np.array([stats.rankdata(mean_squares(2.0, d, points)) for d in range(32)])
    correlation = np.corrcoef(ranks) - np.eye(32)
    assert np.abs(correlation).max() < most
