"""Charge from open probabilities.

No published worked example with its digits was found; the checks are the relation itself, worked out by hand
for two states, and exact curves of schemes whose charge is known.
"""

from __future__ import annotations

from dataclasses import FrozenInstanceError
from math import exp, log

import numpy as np
import pytest
from numpy.typing import NDArray

from cornerwise.errors import UsageError
from cornerwise.gating import (
    AllostericOpening,
    ConcertedOpening,
    GatingScheme,
    LinearSequence,
    example_schemes,
)
from cornerwise.limiting_slope import LimitingSlope, limiting_slope
from cornerwise.opening_schemes import Family, Points, Sensors, Sequence
from cornerwise.units import thermal_voltage_mv

FloatArray = NDArray[np.float64]

CELSIUS = 22.0
KT = 25.4341  # mV at 22 degrees, from the CODATA constants k and e
SCHEMES = example_schemes()
ALLOSTERIC = {
    "example": SCHEMES["allosteric"],
    "large": AllostericOpening(
        sensor_charge_e0=2.9,
        sensor_midpoint_mv=-40.0,
        opening_charge_e0=1.0,
        opening_energy_mev=240.0,
        sensor_coupling_mev=80.0,
    ),
    "low floor": AllostericOpening(
        sensor_charge_e0=2.0,
        sensor_midpoint_mv=-20.0,
        opening_charge_e0=0.6,
        opening_energy_mev=300.0,
        sensor_coupling_mev=95.0,
    ),
}
FLOORLESS: dict[str, GatingScheme] = {
    "two states": SCHEMES["two states"],
    "sequence of 3": SCHEMES["linear sequence"],
    "shifted intermediate": SCHEMES["shifted intermediate"],
    "concerted": SCHEMES["concerted opening"],
    "sequence of 2": LinearSequence(charges_e0=(2.0, 2.5), midpoints_mv=(-40.0, -20.0)),
    "sequence of 3, 13 e0": LinearSequence(charges_e0=(4.0, 6.0, 3.0), midpoints_mv=(-75.0, -50.0, -35.0)),
    "sequence of 4, 13.2 e0": LinearSequence(
        charges_e0=(3.3,) * 4, midpoints_mv=(-65.0, -55.0, -50.0, -40.0)
    ),
    "sequence of 5, 14 e0": LinearSequence(
        charges_e0=(2.5, 2.5, 2.5, 2.5, 4.0), midpoints_mv=(-70.0, -60.0, -60.0, -50.0, -45.0)
    ),
    "late opening, 13.6 e0": ConcertedOpening(
        sensor_charge_e0=3.0, sensor_midpoint_mv=-50.0, opening_charge_e0=1.6, opening_midpoint_mv=-20.0
    ),
    "easy opening, 12.4 e0": ConcertedOpening(
        sensor_charge_e0=2.6, sensor_midpoint_mv=-45.0, opening_charge_e0=2.0, opening_midpoint_mv=-70.0
    ),
}


def recorded(scheme: GatingScheme, lowest: float, offset_mv: float = 0.0) -> tuple[FloatArray, FloatArray]:
    """Steps of 5 mV from the lowest open probability to 95 % of the largest."""
    v = np.arange(-160.0, 160.0, 5.0) + offset_mv
    po = scheme.open_probability(v)
    kept = (v >= v[np.argmax(po >= lowest)]) & (v <= v[np.argmax(po >= 0.95 * po.max())])
    return v[kept], po[kept]


def noisy(scheme: GatingScheme, lowest: float, seed: int) -> tuple[FloatArray, FloatArray]:
    """Scatter of 10 % below 1e-3 and of 5 % above it."""
    rng = np.random.default_rng(seed)
    v, po = recorded(scheme, lowest, rng.uniform(0.0, 5.0))
    scatter = np.where(po < 1e-3, 0.10, 0.05) * np.minimum(1.0, 2.0 * (1.0 - po))
    return v, np.minimum(po * np.exp(scatter * rng.standard_normal(len(po))), 1.0)


def found(curve: tuple[FloatArray, FloatArray]) -> LimitingSlope:
    return limiting_slope(*curve, temperature_c=CELSIUS)


def two_states(v: FloatArray, charge: float = 5.0, midpoint: float = -40.0) -> FloatArray:
    return 1.0 / (1.0 + np.exp(-charge * (v - midpoint) / KT))


# The schemes that are fitted


def _theta(*values: float) -> FloatArray:
    return np.array([[log(-log(0.8)), *values]])


POINTS = Points(v_mv=np.linspace(-90.0, 20.0, 23), log_po=np.linspace(-14.0, -0.3, 23), kt_mv=KT)


def _shape(log_po: FloatArray) -> FloatArray:
    """ln Po/(1 - Po) against its value at the first point, which takes out a free level."""
    odds = log_po - np.log1p(-np.exp(log_po))
    return np.asarray(odds - odds[0])


def test_sequence_is_the_linear_sequence_under_a_lower_ceiling() -> None:
    scheme = LinearSequence(charges_e0=(3.0, 5.0, 2.5), midpoints_mv=(-75.0, -50.0, -25.0))
    theta = _theta(-50.0, log(3.0), log(5.0), log(2.5), -25.0, 0.0, 25.0)
    value, _ = Sequence(POINTS, 3).model(theta)
    expected = log(0.8) + scheme.log_open_probability(POINTS.v_mv)
    np.testing.assert_allclose(value[0], expected, rtol=1e-5)  # kT typed to six digits
    assert Sequence(POINTS, 3).charge_gradient(theta[0]).sum() == pytest.approx(10.5)


@pytest.mark.parametrize("allosteric", [False, True])
def test_sensors_are_the_concerted_and_the_allosteric_opening(allosteric: bool) -> None:
    scheme: GatingScheme = ConcertedOpening(
        sensor_charge_e0=2.8, sensor_midpoint_mv=-50.0, opening_charge_e0=1.8, opening_midpoint_mv=-45.0
    )
    coupling = [80.0 / KT] if allosteric else []
    if allosteric:
        scheme = AllostericOpening(
            sensor_charge_e0=2.8,
            sensor_midpoint_mv=-50.0,
            opening_charge_e0=1.8,
            opening_energy_mev=150.0,
            sensor_coupling_mev=80.0,
        )
    theta = _theta(-50.0, log(2.8), log(1.8), -3.0, *coupling)
    family = Sensors(POINTS, 4, allosteric=allosteric)
    odds, _ = family.log_odds(theta)
    np.testing.assert_allclose(
        odds[0] - odds[0, 0], _shape(scheme.log_open_probability(POINTS.v_mv)), rtol=1e-5, atol=1e-9
    )
    assert family.charge_gradient(theta[0]).sum() == pytest.approx(scheme.total_charge_e0)


@pytest.mark.parametrize(
    ("family", "theta"),
    [
        (Sequence(POINTS, 3), _theta(-48.0, 1.1, 1.4, 0.9, -20.0, 5.0, 12.0)),
        (Sensors(POINTS, 4, allosteric=False), _theta(-48.0, 1.0, 0.5, -2.0)),
        (Sensors(POINTS, 4, allosteric=True), _theta(-48.0, 1.0, 0.5, -2.0, 3.5)),
    ],
    ids=["sequence", "concerted", "allosteric"],
)
def test_derivatives_are_those_of_the_curve(family: Family, theta: FloatArray) -> None:
    _, by_theta = family.model(theta)
    for i in range(theta.shape[1]):
        step = np.zeros_like(theta)
        step[0, i] = 1e-5
        numeric = (family.model(theta + step)[0] - family.model(theta - step)[0])[0] / 2e-5
        np.testing.assert_allclose(by_theta[0, :, i], numeric, rtol=1e-6, atol=1e-8)


# What it recovers


def test_slope_of_two_states_worked_out_by_hand() -> None:
    # Far below the midpoint Po = exp(5 (V + 40)/kT): 10 mV change ln Po by 50/25.4341 = 1.96586.
    v = np.arange(-110.0, -20.0, 5.0)
    po = two_states(v)
    assert log(po[2] / po[0]) == pytest.approx(1.96586, abs=1e-4)
    result = limiting_slope(v, po, temperature_c=CELSIUS)
    assert result.steepest_slope_e0 == pytest.approx(5.0, rel=1e-3)
    assert result.charge_e0 == pytest.approx(5.0, rel=0.01)
    assert result.reached_limit
    assert result.warnings == ()


@pytest.mark.parametrize("name", FLOORLESS)
def test_charge_within_5_percent_from_probabilities_down_to_a_millionth(name: str) -> None:
    scheme = FLOORLESS[name]
    result = found(recorded(scheme, 1e-6))
    assert result.charge_e0 == pytest.approx(scheme.total_charge_e0, rel=0.05)
    assert result.reached_limit
    assert not result.is_lower_bound
    assert "limiting slope" in result.method
    assert result.warnings == ()


@pytest.mark.parametrize("name", ALLOSTERIC)
def test_floor_is_seen_and_the_charge_above_the_steepest_slope_recovered(name: str) -> None:
    scheme = ALLOSTERIC[name]
    result = found(recorded(scheme, 1e-6))
    assert result.charge_e0 == pytest.approx(scheme.total_charge_e0, rel=0.05)
    assert result.steepest_slope_e0 < 0.8 * scheme.total_charge_e0
    assert result.basis == "floor"
    assert not result.reached_limit
    assert len(result.warnings) == 1
    assert f"levels off below {result.steepest_low_mv:g} mV" in result.warnings[0]


@pytest.mark.parametrize("name", [*FLOORLESS, *ALLOSTERIC])
def test_a_curve_that_stops_at_a_hundredth_is_a_lower_bound_and_says_so(name: str) -> None:
    scheme = {**FLOORLESS, **ALLOSTERIC}[name]
    result = found(recorded(scheme, 1e-2))
    assert result.is_lower_bound
    assert not result.reached_limit
    assert result.charge_e0 == result.steepest_slope_e0 <= scheme.total_charge_e0
    assert "lower bound" in result.method
    assert f"{result.steepest_slope_e0:.2f} e0" in result.warnings[0]
    assert "has not reached its limiting slope" in result.warnings[0]
    assert result.extrapolated_std_uncertainty_e0 > 0.05 * result.extrapolated_e0


@pytest.mark.parametrize("lowest", [1e-2, 1e-4, 1e-6])
def test_a_steep_part_still_in_reach_is_not_taken_for_the_limit(lowest: float) -> None:
    result = found(recorded(SCHEMES["biphasic"], lowest))
    assert result.is_lower_bound
    assert result.charge_e0 < SCHEMES["biphasic"].total_charge_e0


@pytest.mark.parametrize("name", ["concerted", "easy opening, 12.4 e0", "sequence of 5, 14 e0", "two states"])
def test_mean_of_noisy_cells_is_within_5_percent(name: str) -> None:
    scheme = FLOORLESS[name]
    cells = [found(noisy(scheme, 1e-6, seed)) for seed in range(12)]
    charges = np.array([cell.extrapolated_e0 for cell in cells])
    assert charges.mean() == pytest.approx(scheme.total_charge_e0, rel=0.05)
    near = [
        abs(c.extrapolated_e0 - scheme.total_charge_e0) < 3.0 * c.extrapolated_std_uncertainty_e0
        for c in cells
    ]
    assert np.mean(near) >= 0.9
    assert np.median([cell.scatter for cell in cells]) == pytest.approx(0.08, abs=0.05)


def test_uncertainty_grows_as_less_is_seen() -> None:
    relative = []
    for lowest in (1e-6, 1e-4, 1e-2):
        result = found(noisy(FLOORLESS["concerted"], lowest, 5))
        relative.append(result.extrapolated_std_uncertainty_e0 / result.extrapolated_e0)
    assert relative == sorted(relative)


def test_largest_open_probability_may_lie_below_one() -> None:
    scheme = SCHEMES["inactivated"]
    result = found(recorded(scheme, 1e-6))
    assert scheme.open_probability(50.0) < 0.13
    assert result.charge_e0 == pytest.approx(scheme.total_charge_e0, rel=0.08)


def test_points_beyond_the_top_change_nothing() -> None:
    scheme = FLOORLESS["concerted"]
    v, po = recorded(scheme, 1e-6)
    beyond = np.arange(v[-1] + 5.0, v[-1] + 100.0, 5.0)
    falling = po.max() * np.linspace(0.99, 0.6, len(beyond))
    assert found((np.append(v, beyond), np.append(po, falling))) == found((v, po))


# What it takes


def test_same_points_in_any_order_give_the_same_bytes() -> None:
    v, po = noisy(FLOORLESS["concerted"], 1e-6, 3)
    order = np.random.default_rng(1).permutation(len(v))
    assert found((v, po)) == found((v[order], po[order]))


def test_charge_is_in_units_of_kt() -> None:
    v = np.arange(-110.0, -20.0, 5.0)
    warm, cold = (limiting_slope(v, two_states(v), temperature_c=t) for t in (37.0, 10.0))
    ratio = thermal_voltage_mv(37.0) / thermal_voltage_mv(10.0)
    assert warm.steepest_slope_e0 / cold.steepest_slope_e0 == pytest.approx(ratio, rel=1e-12)
    assert warm.charge_e0 / cold.charge_e0 == pytest.approx(ratio, rel=0.01)


def test_zeros_are_left_out_and_said() -> None:
    v = np.arange(-110.0, -20.0, 5.0)
    po = two_states(v)
    with_zeros = limiting_slope(
        np.append([-120.0, -115.0], v), np.append([0.0, 0.0], po), temperature_c=CELSIUS
    )
    assert with_zeros.zeros_left_out == 2
    assert with_zeros.charge_e0 == limiting_slope(v, po, temperature_c=CELSIUS).charge_e0
    assert with_zeros.lowest_po == pytest.approx(exp(-5.0 * 70.0 / KT), rel=1e-4)
    assert with_zeros.warnings == ("2 open probabilities of 0 were below what was resolved and left out",)


def test_window_is_what_was_fitted() -> None:
    v, po = recorded(FLOORLESS["concerted"], 1e-6)
    result = found((v, po))
    fitted = v[: np.argmax(po >= 0.95 * po.max()) + 1]
    assert (result.window_low_mv, result.window_high_mv, result.points) == (v[0], fitted[-1], len(fitted))
    assert v[0] <= result.steepest_low_mv < result.steepest_high_mv <= v[-1]


def test_result_cannot_be_changed() -> None:
    result = found(recorded(FLOORLESS["two states"], 1e-4))
    with pytest.raises(FrozenInstanceError):
        result.charge_e0 = 1.0  # type: ignore[misc]


V = np.arange(-60.0, -20.0, 5.0)


@pytest.mark.parametrize(
    ("v", "po", "match"),
    [
        (V[:3], two_states(V[:3]), "found 3 voltages .* needs 4: record 1 more"),
        (V[:5], np.append([0.0, 0.0], two_states(V[2:5])), r"found 3 voltages .* \(2 zeros left out\)"),
        (np.array([-50.0, -50.0, -45.0, -40.0]), two_states(V[:4]), "found 3 voltages"),
        (V, np.append(two_states(V[:-1]), 1.2), r"1\.2 at -25 mV; it must lie within 0 to 1"),
        (V, np.append(two_states(V[:-1]), -0.1), r"-0\.1 at -25 mV"),
        (V, np.append(two_states(V[:-1]), np.nan), "not a finite number"),
        (V, two_states(V[:-1]), "one to one"),
        (V, two_states(V)[::-1], "sign of its voltages reversed"),
    ],
    ids=["three", "zeros", "repeated", "above 1", "below 0", "nan", "lengths", "falling"],
)
def test_what_cannot_be_used_is_refused_by_name(v: FloatArray, po: FloatArray, match: str) -> None:
    with pytest.raises(UsageError, match=match):
        limiting_slope(v, po, temperature_c=CELSIUS)


def test_a_channel_has_a_sensor() -> None:
    with pytest.raises(UsageError, match="at least 1"):
        limiting_slope(V, two_states(V), temperature_c=CELSIUS, sensors=0)


def test_four_points_are_enough() -> None:
    v = np.arange(-55.0, -39.0, 5.0)
    result = limiting_slope(v, two_states(v), temperature_c=CELSIUS)
    assert result.points == 4
    assert result.is_lower_bound
