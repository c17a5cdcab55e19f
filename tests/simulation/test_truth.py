"""True interactions, from the partition function and from what was put in."""

from math import exp, log

import pytest

from cornerwise import truth_of
from cornerwise.campaign import Settings
from cornerwise.simulation import SideState
from cornerwise.units import convert_energy, energy_per_e0_mv, thermal_voltage_mv
from simulation.models import ALONE, BOTH, OTHER, effect, model

MEV = Settings(wild_type="WT", energy_unit="meV")
SINGLES = (
    effect(ALONE, activation_mev=80.0, charge_e0=-0.5, states_mev={"first": -20.0}),
    effect(OTHER, steps_mev={"second": -45.0}, step_charges_e0={"third": -0.3}),
)


def test_effects_that_add_up_do_not_interact() -> None:
    (row,) = truth_of(model(*SINGLES, settings=MEV)).cycles
    assert row.interaction == pytest.approx(0.0, abs=1e-10)
    assert row.charge_interaction_e0 == pytest.approx(0.0, abs=1e-12)
    assert row.shortcut != pytest.approx(0.0, abs=1.0)  # the charges change


def test_what_is_added_when_both_are_present_is_the_interaction() -> None:
    (row,) = truth_of(model(*SINGLES, effect(BOTH, activation_mev=55.0, charge_e0=0.2), settings=MEV)).cycles
    assert row.interaction == pytest.approx(55.0, abs=1e-10)
    assert row.charge_interaction_e0 == pytest.approx(0.2, abs=1e-12)
    assert row.mutations == ("E21A", "R84Q")


def test_units_and_reference_voltage() -> None:
    effects = (*SINGLES, effect(BOTH, activation_mev=55.0, charge_e0=0.2))
    moved = Settings(wild_type="WT", energy_unit="kJ/mol", reference_voltage_mv=-50.0)
    truth = truth_of(model(*effects, settings=moved))
    # I(V) = I - F V J: the charge interaction carries the voltage.
    expected = convert_energy(55.0 + 50.0 * 0.2, "meV", "kJ/mol", 22.0)
    assert truth.cycles[0].interaction == pytest.approx(expected, rel=1e-10)
    per = energy_per_e0_mv("kJ/mol", 22.0)
    wild = truth.constructs[0]
    assert wild.energy == pytest.approx(per * wild.charge_e0 * (wild.median_mv + 50.0), rel=1e-12)


def test_two_mutations_of_one_side_state_interact_though_nothing_was_added() -> None:
    kt = thermal_voltage_mv(22.0)
    sides = (SideState(name="inactivated", beside="activated", energy_mev=-20.0),)
    effects = (
        effect(ALONE, states_mev={"inactivated": 80.0}),
        effect(OTHER, states_mev={"inactivated": -90.0}),
    )
    (row,) = truth_of(model(*effects, sides=sides, settings=MEV)).cycles
    # Each corner's energy is -kT ln(1 + K); K is a product of the two effects, ln(1 + K) no sum of two.
    energies = [-kt * log(1 + exp(-e / kt)) for e in (-20.0, 60.0, -110.0, -30.0)]
    assert row.interaction == pytest.approx(energies[0] - energies[1] - energies[2] + energies[3], abs=1e-10)
    assert abs(row.interaction) > 30.0


def test_wild_type_comes_first_and_labels_are_in_residue_order() -> None:
    labels = [row.construct for row in truth_of(model(*SINGLES)).constructs]
    assert labels == ["WT", "E21A", "R84Q", "E21A/R84Q"]
