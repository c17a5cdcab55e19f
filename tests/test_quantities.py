"""One quantity, in cells or summarised, against numpy and statsmodels."""

import math

import numpy as np
import pytest
from statsmodels.stats.weightstats import DescrStatsW

from cornerwise.quantities import Sample, Summary, in_words, shared_cells

VALUES = np.array([3.0, 4.5, 3.9, 5.2])


def _sample(values: np.ndarray, prefix: str = "c") -> Sample:
    return Sample(cells=tuple(f"{prefix}{i}" for i in range(len(values))), values=values)


def test_mean_error_and_degrees_of_freedom_of_cells() -> None:
    sample, reference = _sample(VALUES), DescrStatsW(VALUES)
    assert sample.n == 4
    assert sample.mean == pytest.approx(reference.mean)
    assert sample.sem == pytest.approx(reference.std_mean)
    assert sample.dof == 3


def test_few_cells() -> None:
    one, none = _sample(VALUES[:1]), _sample(VALUES[:0])
    assert (one.mean, one.dof) == (3.0, 0)
    assert math.isnan(one.sem)
    assert math.isnan(none.mean)
    assert _sample(VALUES[:2]).sem == pytest.approx(0.75)


def test_degrees_of_freedom_of_a_summary() -> None:
    assert Summary(mean=1.0, sem=0.1, n=5).dof == 4
    assert math.isinf(Summary(mean=1.0, sem=0.1, n=None).dof)


def test_cells_that_show_both() -> None:
    medians = Sample(cells=("b", "a", "c"), values=VALUES[:3])
    charges = Sample(cells=("d", "c", "b"), values=VALUES[:3])
    assert shared_cells(medians, charges) == ("b", "c")
    assert shared_cells(medians, Summary(mean=1.0, sem=0.1, n=5)) == ()
    assert shared_cells(Summary(mean=1.0, sem=0.1, n=5), charges) == ()
    assert shared_cells(medians, None) == ()


def test_in_words() -> None:
    told = [in_words(q) for q in (_sample(VALUES), _sample(VALUES[:1]), Summary(mean=1.0, sem=0.1, n=None))]
    assert told == ["4 cells", "1 cell", "stated"]
