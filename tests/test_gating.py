from __future__ import annotations

from math import exp, log

import numpy as np
import pytest

from cornerwise.gating import (
    AllostericOpening,
    ConcertedOpening,
    GatingScheme,
    InactivatedAfterOpen,
    LinearSequence,
    TwoStates,
    example_schemes,
)
from cornerwise.units import thermal_voltage_mv

SCHEMES = example_schemes()
FINE = np.linspace(-600.0, 600.0, 24_001)


def area_median(scheme: GatingScheme) -> float:
    """Equal areas by the trapezoid rule, which knows nothing of energies."""
    return float(FINE[-1] - np.trapezoid(scheme.q(FINE), FINE))


def crossing(values: np.ndarray, level: float = 0.5) -> float:
    return float(np.interp(level, values, FINE))


@pytest.mark.parametrize("name", SCHEMES)
def test_energy_over_charge_is_the_median_of_the_curve(name: str) -> None:
    scheme = SCHEMES[name]
    assert area_median(scheme) == pytest.approx(scheme.median_mv, abs=1e-6)
    assert scheme.activation_energy_mev == pytest.approx(scheme.total_charge_e0 * scheme.median_mv, rel=1e-14)


@pytest.mark.parametrize("name", SCHEMES)
def test_curve_rises_from_nought_to_one(name: str) -> None:
    q = SCHEMES[name].q(FINE)
    assert q[0] == pytest.approx(0.0, abs=1e-8)
    assert q[-1] == pytest.approx(1.0, abs=1e-8)
    assert (np.diff(q) > -1e-12).all()


def test_linear_sequence_against_a_value_worked_out_by_hand() -> None:
    # Three states, z 2 and 3, steps of -9 and +4 kJ/mol at 293.15 K: Vm = sum(dG)/(F sum(z)) = -10.364269656;
    # arithmetic with the exact CODATA F = 96485.3321233... C/mol, no publication.
    faraday = 96485.3321233100184
    steps = (-9000.0 / (2 * faraday) * 1000, 4000.0 / (3 * faraday) * 1000)
    scheme = LinearSequence(charges_e0=(2.0, 3.0), midpoints_mv=steps, temperature_c=20.0)
    assert scheme.median_mv == pytest.approx(-10.364269656, abs=1e-8)
    assert area_median(scheme) == pytest.approx(-10.364269656, abs=1e-6)


def test_two_states_open_as_they_move() -> None:
    scheme = TwoStates(charge_e0=4.0, midpoint_mv=-30.0)
    v = np.array([-60.0, -30.0, 5.0])
    expected = 1 / (1 + np.exp(-4.0 * (v + 30.0) / thermal_voltage_mv(22.0)))
    np.testing.assert_allclose(scheme.q(v), expected, rtol=1e-12)
    np.testing.assert_allclose(scheme.open_probability(v), expected, rtol=1e-12)


def test_concerted_opening_follows_its_closed_form() -> None:
    scheme = ConcertedOpening(
        sensors=3,
        sensor_charge_e0=2.0,
        sensor_midpoint_mv=-40.0,
        opening_charge_e0=1.5,
        opening_midpoint_mv=10.0,
    )
    kt, v = thermal_voltage_mv(22.0), -20.0
    s, o = exp(2.0 * (v + 40.0) / kt), exp(1.5 * (v - 10.0) / kt)
    assert scheme.open_probability(v) == pytest.approx(s**3 * o / ((1 + s) ** 3 + s**3 * o), rel=1e-12)
    assert scheme.median_mv == pytest.approx((6.0 * -40.0 + 1.5 * 10.0) / 7.5, rel=1e-12)


def test_allosteric_energy_with_a_charged_opening() -> None:
    scheme = AllostericOpening(
        sensor_charge_e0=2.0,
        sensor_midpoint_mv=-20.0,
        opening_charge_e0=0.6,
        opening_energy_mev=200.0,
        sensor_coupling_mev=70.0,
    )
    assert scheme.activation_energy_mev == pytest.approx(4 * 2.0 * -20.0 + 200.0 - 4 * 70.0, rel=1e-12)


def test_allosteric_ends_hold_closed_and_open_when_opening_moves_no_charge() -> None:
    scheme = AllostericOpening(
        sensor_charge_e0=2.0,
        sensor_midpoint_mv=-20.0,
        opening_charge_e0=0.0,
        opening_energy_mev=200.0,
        sensor_coupling_mev=70.0,
    )
    kt = thermal_voltage_mv(22.0)
    rest, active = -kt * log(1 + exp(-200.0 / kt)), -160.0 - kt * log(1 + exp((280.0 - 200.0) / kt))
    assert scheme.activation_energy_mev == pytest.approx(active - rest, rel=1e-12)
    assert area_median(scheme) == pytest.approx(scheme.median_mv, abs=1e-6)


def test_inactivation_lowers_the_end_the_energy_reaches() -> None:
    sequence = LinearSequence(charges_e0=(3.0, 5.0), midpoints_mv=(-60.0, -40.0))
    kt = thermal_voltage_mv(22.0)
    scheme = InactivatedAfterOpen(sequence=sequence, inactivation_energy_mev=-50.0)
    lowered = sequence.activation_energy_mev - scheme.activation_energy_mev
    assert lowered == pytest.approx(kt * log(1 + exp(50.0 / kt)), rel=1e-12)
    assert scheme.open_probability(400.0) == pytest.approx(1 / (1 + exp(50.0 / kt)), rel=1e-9)


def test_an_intermediate_moves_the_open_probability_and_not_the_energy() -> None:
    before = LinearSequence(charges_e0=(8.0, 2.0), midpoints_mv=(-50.0, -30.0))
    after = before.shift_intermediate(1, -60.0)
    assert after.activation_energy_mev == pytest.approx(before.activation_energy_mev, rel=1e-14)
    assert area_median(after) == pytest.approx(area_median(before), abs=1e-6)
    moved = crossing(after.open_probability(FINE)) - crossing(before.open_probability(FINE))
    assert moved > 20.0


@pytest.mark.parametrize("state", [0, 2, -1])
def test_only_intermediates_can_be_shifted(state: int) -> None:
    sequence = LinearSequence(charges_e0=(8.0, 2.0), midpoints_mv=(-50.0, -30.0))
    with pytest.raises(ValueError, match="no intermediate; use 1 to 1"):
        sequence.shift_intermediate(state, 1.0)


def test_limiting_slope_is_the_charge_that_opening_needs() -> None:
    scheme = SCHEMES["concerted opening"]
    far = -600.0
    assert scheme.limiting_charge_e0(far) == pytest.approx(scheme.total_charge_e0, rel=1e-9)
    slope = np.diff(scheme.log_open_probability([far, far + 1.0]))[0] * thermal_voltage_mv(22.0)
    assert slope == pytest.approx(scheme.total_charge_e0, rel=1e-9)
    # An allosteric scheme opens a little with no sensor activated: the slope ends at the opening's charge.
    assert SCHEMES["allosteric"].limiting_charge_e0(-900.0) == pytest.approx(0.6, abs=1e-6)


def test_log_open_probability_survives_where_the_probability_underflows() -> None:
    scheme = SCHEMES["concerted opening"]
    value = scheme.log_open_probability(-3000.0)
    assert np.isfinite(value)
    assert value < -1000.0
    assert scheme.open_probability(-3000.0) == 0.0


@pytest.mark.parametrize("shape", [(), (3,), (2, 4)])
def test_shape_of_the_voltages_is_kept(shape: tuple[int, ...]) -> None:
    v = np.full(shape, -40.0)
    for scheme in SCHEMES.values():
        assert scheme.q(v).shape == shape
        assert scheme.open_probability(v).shape == shape
        assert scheme.limiting_charge_e0(v).shape == shape
