"""Every gating model that ships: its truth from a second implementation, and recovered without noise."""

from dataclasses import replace
from math import comb, exp, log
from pathlib import Path

import pytest

import cornerwise
from cornerwise.simulation import scheme_of
from cornerwise.units import energy_per_e0_mv, thermal_voltage_mv

MODELS = {
    path.stem: path for path in sorted((Path(__file__).parents[1] / "examples" / "models").glob("*.toml"))
}
KT = thermal_voltage_mv(22.0)
PER_MEV = energy_per_e0_mv("kcal/mol", 22.0)

# What each model says is added when both mutations are present, in kcal/mol; copies of a step count each.
PUT_IN = {
    "two_states": 2.4, "sequence": -1.6, "sensors_then_opening": 4 * 0.5, "biphasic": -1.5, "allosteric": 1.6,
    "distinct_sensors": 1.5,
}  # fmt: skip


def test_all_are_known() -> None:
    assert set(MODELS) == {*PUT_IN, "inactivated", "closed_inactivated"}


@pytest.mark.parametrize("name", PUT_IN)
def test_where_each_end_is_one_state_the_truth_is_what_was_put_in(name: str) -> None:
    (row,) = cornerwise.truth_of(cornerwise.read_model(MODELS[name])).cycles
    assert row.interaction == pytest.approx(PUT_IN[name], abs=1e-9)


def test_inactivation_makes_an_interaction_of_effects_that_add_up() -> None:
    (row,) = cornerwise.truth_of(cornerwise.read_model(MODELS["inactivated"])).cycles
    ends = [-KT * PER_MEV * log(1 + exp(-e / (KT * PER_MEV))) for e in (-0.5, 1.5, -2.7, -0.7)]
    assert row.interaction == pytest.approx(ends[0] - ends[1] - ends[2] + ends[3], abs=1e-9)


def test_closed_inactivation_by_a_direct_sum() -> None:
    """The activated end is two states; whatever stands beside a closed state leaves no trace."""
    kt = KT * PER_MEV
    sides = {"": 0.0, "N": 0.9, "W": 0.0, "NW": 0.9 - 1.8}
    activated = {"": 0.0, "N": 0.0, "W": -1.2, "NW": -1.2}
    energy = {k: activated[k] - kt * log(1 + exp(-(-1.2 + sides[k]) / kt)) for k in sides}
    (row,) = cornerwise.truth_of(cornerwise.read_model(MODELS["closed_inactivated"])).cycles
    expected = energy[""] - energy["N"] - energy["W"] + energy["NW"]
    assert row.interaction == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("name", MODELS)
def test_without_noise_couple_recovers_the_truth(name: str) -> None:
    model = cornerwise.read_model(MODELS[name])
    quiet = replace(model.recording, noise=0.0, cell_sd_mv=0.0, charge_sd=0.0, cells=3, charge_cells=3)
    quiet_model = replace(
        model, recording=quiet, common=replace(model.common, decimals=14, charge_decimals=12)
    )
    (found,) = cornerwise.couple(cornerwise.simulate(quiet_model)).interactions
    (true,) = cornerwise.truth_of(model).cycles
    # 0.01 kcal/mol is 0.03 mV of one corner's median; where no shape of the estimator's is the scheme's, the
    # shape is off by that much.
    assert found.interaction == pytest.approx(true.interaction, abs=0.01)
    assert found.charge_interaction_e0 == pytest.approx(true.charge_interaction_e0, abs=1e-9)
    assert found.shortcut == pytest.approx(true.shortcut, abs=0.01)


def test_curves_of_sensors_by_a_direct_sum() -> None:
    scheme = scheme_of(cornerwise.read_model(MODELS["sensors_then_opening"]))
    for v in (-80.0, -50.0, -20.0):
        s, o = exp(2.8 * (v + 50) / KT), exp(1.8 * (v + 45) / KT)
        weights = [comb(4, k) * s**k for k in range(5)] + [s**4 * o]
        charges = [2.8 * k for k in range(5)] + [4 * 2.8 + 1.8]
        mean = sum(w * z for w, z in zip(weights, charges, strict=True)) / sum(weights)
        assert scheme.q(v) == pytest.approx(mean / 13.0, rel=1e-12)
