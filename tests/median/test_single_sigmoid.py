from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import curve_fit

from cornerwise.campaign import Curve
from cornerwise.gating import LinearSequence, TwoStates, example_schemes
from cornerwise.median.single_sigmoid import sigmoids_of_cells, single_sigmoid
from cornerwise.units import thermal_voltage_mv


def curve(v: np.ndarray, charge: np.ndarray, cell: str = "c1") -> Curve:
    return Curve(construct="invented", cell=cell, voltage_mv=v, charge=charge)


def test_two_states_give_back_their_charge_and_energy() -> None:
    scheme = TwoStates(charge_e0=4.0, midpoint_mv=-30.0, temperature_c=20.0)
    v = np.arange(-120.0, 61.0, 5.0)
    found = single_sigmoid([curve(v, 2.0 * scheme.q(v) - 1.0, f"c{i}") for i in range(3)], temperature_c=20.0)
    assert found is not None
    assert found.midpoint_mv == pytest.approx(-30.0, abs=1e-6)
    assert found.slope_charge_e0 == pytest.approx(4.0, rel=1e-6)
    assert found.energy_mev == pytest.approx(scheme.activation_energy_mev, rel=1e-6)
    assert found.energy_sem_mev == pytest.approx(0.0, abs=1e-9)
    assert found.cells[0].low_plateau == pytest.approx(-1.0, abs=1e-6)


def test_more_states_give_less_charge_than_they_move() -> None:
    scheme = example_schemes()["linear sequence"]
    assert isinstance(scheme, LinearSequence)
    v = np.arange(-170.0, 131.0, 5.0)
    found = single_sigmoid([curve(v, scheme.q(v))], temperature_c=22.0)
    assert found is not None
    assert found.slope_charge_e0 < 0.5 * scheme.total_charge_e0
    assert abs(found.energy_mev) < 0.5 * abs(scheme.activation_energy_mev)
    assert found.energy_sem_mev is None


def test_the_temperature_scales_the_slope_charge_alone() -> None:
    scheme = TwoStates(charge_e0=4.0, midpoint_mv=-30.0)
    v = np.arange(-120.0, 61.0, 5.0)
    cold, warm = (sigmoids_of_cells([curve(v, scheme.q(v))], temperature_c=t)[0] for t in (10.0, 30.0))
    assert warm.midpoint_mv == pytest.approx(cold.midpoint_mv, abs=1e-9)
    assert warm.slope_charge_e0 / cold.slope_charge_e0 == pytest.approx(303.15 / 283.15, rel=1e-12)


def test_unreadable_curves_are_left_out() -> None:
    v = np.arange(-120.0, 61.0, 5.0)
    good, flat = curve(v, TwoStates(charge_e0=4.0, midpoint_mv=-30.0).q(v)), curve(v, np.ones(len(v)), "flat")
    found = single_sigmoid([flat, good], temperature_c=22.0)
    assert found is not None
    assert [cell.cell for cell in found.cells] == ["c1"]
    assert single_sigmoid([flat], temperature_c=22.0) is None
    with pytest.raises(ValueError, match="invented/flat: no rise"):
        sigmoids_of_cells([good, flat], temperature_c=22.0)


def test_mean_and_standard_error_are_over_cells() -> None:
    v = np.arange(-120.0, 61.0, 5.0)
    mids = [-32.0, -30.0, -26.0]
    made = [curve(v, TwoStates(charge_e0=4.0, midpoint_mv=m).q(v), f"c{m}") for m in mids]
    found = single_sigmoid(made, temperature_c=22.0)
    assert found is not None
    assert found.midpoint_mv == pytest.approx(np.mean(mids), abs=1e-6)
    assert found.midpoint_sem_mv == pytest.approx(np.std(mids, ddof=1) / math.sqrt(3), abs=1e-6)


def test_no_other_midpoint_and_slope_fit_better_and_cells_are_fitted_apart() -> None:
    generator = np.random.default_rng(4)
    made = []
    for number, scheme in enumerate(example_schemes().values()):
        v = np.linspace(-160.0, 80.0, 15 + number % 3 * 8)
        made.append(curve(v, 40.0 * scheme.q(v) + generator.normal(0.0, 0.8, len(v)), f"c{number}"))
    together = sigmoids_of_cells(made, temperature_c=22.0)
    assert together == tuple(sigmoids_of_cells([one], temperature_c=22.0)[0] for one in made)
    kt_mv = thermal_voltage_mv(22.0)

    def model(v: np.ndarray, midpoint: float, charge: float, low: float, high: float) -> np.ndarray:
        return low + (high - low) / (1.0 + np.exp(-charge * (v - midpoint) / kt_mv))

    for one, found in zip(made, together, strict=True):
        start = (found.midpoint_mv + 1.0, found.slope_charge_e0 * 1.05, found.low_plateau, found.high_plateau)
        best, _ = curve_fit(model, one.voltage_mv, one.charge, p0=start, ftol=1e-15, xtol=1e-15, gtol=1e-15)
        least = float(((one.charge - model(one.voltage_mv, *best)) ** 2).sum())
        assert found.residual_sum_of_squares == pytest.approx(least, rel=1e-9)
        assert (found.midpoint_mv, found.slope_charge_e0) == pytest.approx(tuple(best[:2]), rel=1e-5)
