"""Schemes of constructs against closed forms, a second implementation, and laws of linked functions."""

from __future__ import annotations

from itertools import pairwise
from math import comb, exp, log

import numpy as np
import pytest

from cornerwise.gating import (
    AllostericOpening,
    ConcertedOpening,
    GatingScheme,
    InactivatedAfterOpen,
    LinearSequence,
    TwoStates,
)
from cornerwise.simulation import Coupling, Effect, Model, SideState, scheme_of
from cornerwise.simulation.schemes import states_number
from cornerwise.units import thermal_voltage_mv
from simulation.models import ALONE, BOTH, OTHER, effect, model, step

KT = thermal_voltage_mv(22.0)
V = np.linspace(-140.0, 90.0, 24)
SENSORS = (step("sensor", 2.5, -60.0, 4), step("opening", 1.8, -30.0))


def allosteric(opening_e0: float = 0.6, **changes: object) -> Model:
    steps = (step("sensor", 2.0, -20.0, 4), step("opening", opening_e0, 200.0 / 0.6))
    return model(
        steps=steps,
        order="any",
        couplings=(Coupling(steps=("sensor", "opening"), energy_mev=-70.0),),
        **changes,
    )


PAIRS: dict[str, tuple[Model, GatingScheme]] = {
    "two states": (
        model(steps=(step("activation", 3.5, -45.0),)),
        TwoStates(charge_e0=3.5, midpoint_mv=-45.0),
    ),
    "sequence": (
        model(),
        LinearSequence(charges_e0=(3.0, 5.0, 2.5), midpoints_mv=(-75.0, -50.0, -25.0)),
    ),
    "concerted": (
        model(steps=SENSORS),
        ConcertedOpening(
            sensor_charge_e0=2.5, sensor_midpoint_mv=-60.0, opening_charge_e0=1.8, opening_midpoint_mv=-30.0
        ),
    ),
    "allosteric": (
        allosteric(),
        AllostericOpening(
            sensor_charge_e0=2.0,
            sensor_midpoint_mv=-20.0,
            opening_charge_e0=0.6,
            opening_energy_mev=200.0,
            sensor_coupling_mev=70.0,
        ),
    ),
    "inactivated": (
        model(sides=(SideState(name="inactivated", beside="activated", energy_mev=-50.0),)),
        InactivatedAfterOpen(
            sequence=LinearSequence(charges_e0=(3.0, 5.0, 2.5), midpoints_mv=(-75.0, -50.0, -25.0)),
            inactivation_energy_mev=-50.0,
        ),
    ),
}


@pytest.mark.parametrize("name", PAIRS)
def test_wild_types_are_the_schemes_of_the_gating_room(name: str) -> None:
    made, (_, known) = scheme_of(PAIRS[name][0]), PAIRS[name]
    np.testing.assert_allclose(made.q(V), known.q(V), rtol=1e-11, atol=1e-14)
    np.testing.assert_allclose(made.open_probability(V), known.open_probability(V), rtol=1e-10)
    assert made.median_mv == pytest.approx(known.median_mv, rel=1e-12)
    assert made.total_charge_e0 == pytest.approx(known.total_charge_e0, rel=1e-14)


def test_two_states_follow_the_boltzmann_distribution() -> None:
    # p(activated) = 1/(1 + exp((e - z V)/kT)): the Boltzmann distribution for two levels.
    changed = scheme_of(
        model(effect(ALONE, activation_mev=60.0), steps=(step("activation", 3.5, -45.0),)), ALONE
    )
    expected = 1 / (1 + np.exp((-3.5 * 45.0 + 60.0 - 3.5 * V) / KT))
    np.testing.assert_allclose(changed.q(V), expected, rtol=1e-12)
    assert changed.median_mv == pytest.approx(-45.0 + 60.0 / 3.5, rel=1e-12)


def test_independent_sensors_add_their_two_state_curves() -> None:
    # The partition function of independent parts is the product of theirs, so that mean charges add.
    four = (step("I", 3.4, -75.0), step("II", 3.0, -60.0), step("III", 3.6, -50.0), step("IV", 2.6, -15.0))
    scheme = scheme_of(model(steps=four, order="any"))
    each = [s.charge_e0 / (1 + np.exp((s.energy_mev - s.charge_e0 * V) / KT)) for s in four]
    np.testing.assert_allclose(scheme.q(V), sum(each) / 12.6, rtol=1e-12)
    assert scheme.median_mv == pytest.approx(sum(s.energy_mev for s in four) / 12.6, rel=1e-12)


def test_copies_of_a_step_are_binomial() -> None:
    scheme = scheme_of(model(steps=(step("sensor", 3.0, -50.0, 4),)))
    assert [(s.charge_e0, s.multiplicity) for s in scheme.states()] == [
        (3.0 * k, comb(4, k)) for k in range(5)
    ]
    np.testing.assert_allclose(scheme.q(V), 1 / (1 + np.exp(-3.0 * (V + 50.0) / KT)), rtol=1e-12)


def log_z(scheme: GatingScheme, v: np.ndarray | float) -> np.ndarray:
    """Logarithm of the partition function, summed term by term."""
    return np.log(
        sum(
            s.multiplicity * np.exp((s.charge_e0 * np.asarray(v) - s.energy_mev) / KT)
            for s in scheme.states()
        )
    )


RICH = (
    effect(ALONE, activation_mev=70.0, charge_e0=-0.4, steps_mev={"second": -20.0}),
    effect(OTHER, steps_mv={"first": -8.0}, step_charges_e0={"third": 0.3}, states_mev={"second": 15.0}),
    effect(BOTH, activation_mev=-90.0, states_mev={"inactivated": 30.0}),
)
SIDES = (SideState(name="inactivated", beside="activated", energy_mev=-40.0),
         SideState(name="closed", beside="first", energy_mev=10.0))  # fmt: skip


@pytest.mark.parametrize("mutations", [frozenset(), ALONE, OTHER, BOTH], ids=["wild type", "A", "B", "AB"])
def test_charge_is_the_slope_of_ln_z_and_energy_its_area(mutations: frozenset) -> None:
    # Linked functions (Wyman 1964, Adv Protein Chem 19, 223, from memory): the mean of what is bound,
    # here charge, is the derivative of ln Z by its potential; median potential times number the free energy.
    scheme = scheme_of(model(*RICH, sides=SIDES), mutations)
    h = 1e-3
    slope = KT * (log_z(scheme, V + h) - log_z(scheme, V - h)) / (2 * h)
    np.testing.assert_allclose(scheme.total_charge_e0 * scheme.q(V), slope, rtol=1e-6)
    fine = np.linspace(-700.0, 700.0, 28_001)
    area = fine[-1] - np.trapezoid(scheme.q(fine), fine)
    assert area == pytest.approx(scheme.median_mv, abs=1e-6)


def test_effects_are_reciprocal() -> None:
    # The reciprocal effects of linked functions (Wyman 1964): what raising a state's energy does to the mean
    # charge equals what voltage does to the state's occupancy, with the sign turned: dQ/de = -dp/dV.
    def at(energy: float) -> GatingScheme:
        return scheme_of(model(effect(ALONE, states_mev={"second": energy}), sides=SIDES), ALONE)

    def occupancy(v: np.ndarray) -> np.ndarray:
        scheme = at(0.0)
        (state,) = [s for s in scheme.states() if s.charge_e0 == 8.0]
        return np.exp((state.charge_e0 * v - state.energy_mev) / KT - log_z(scheme, v))

    h = 1e-3
    dq = (at(h).q(V) - at(-h).q(V)) * 10.5 / (2 * h)
    dp = (occupancy(V + h) - occupancy(V - h)) / (2 * h)
    np.testing.assert_allclose(dq, -dp, rtol=1e-5, atol=1e-10)


def test_activation_energy_moves_the_curve_as_a_whole() -> None:
    wild, changed = scheme_of(model()), scheme_of(model(effect(ALONE, activation_mev=84.0)), ALONE)
    np.testing.assert_allclose(changed.q(V + 84.0 / 10.5), wild.q(V), rtol=1e-10)


def test_lost_charge_keeps_the_energy_and_the_voltages_between_steps() -> None:
    changed = scheme_of(model(effect(ALONE, charge_e0=-2.1)), ALONE)
    assert changed.total_charge_e0 == pytest.approx(8.4)
    wild = scheme_of(model())
    assert changed.activation_energy_mev == pytest.approx(wild.activation_energy_mev, rel=1e-12)
    states = changed.states()
    midpoints = [(b.energy_mev - a.energy_mev) / (b.charge_e0 - a.charge_e0) for a, b in pairwise(states)]
    assert np.diff(midpoints) == pytest.approx([25.0, 25.0])


@pytest.mark.parametrize(
    ("change", "energy", "charge"),
    [
        ({"steps_mev": {"second": 30.0}}, 30.0, 0.0),
        ({"steps_mv": {"second": 4.0}}, 20.0, 0.0),
        ({"step_charges_e0": {"second": -0.7}}, 0.0, -0.7),
        ({"states_mev": {"second": 30.0}}, 0.0, 0.0),
        ({"states_mev": {"third": 30.0}}, 30.0, 0.0),
        ({"states_mev": {"activated": 30.0}}, 30.0, 0.0),
        ({"states_mev": {"rest": 30.0}}, -30.0, 0.0),
        ({"steps_mv": {"first": 5.0, "second": -3.0}}, 0.0, 0.0),
    ],
)
def test_what_effects_add_to_the_ends(change: dict, energy: float, charge: float) -> None:
    wild, changed = scheme_of(model()), scheme_of(model(Effect(mutations=ALONE, **change)), ALONE)
    added = changed.activation_energy_mev - wild.activation_energy_mev
    assert added == pytest.approx(energy, abs=1e-10)
    assert changed.total_charge_e0 - wild.total_charge_e0 == pytest.approx(charge, abs=1e-12)


def test_copies_count_an_effect_on_their_step() -> None:
    changed = scheme_of(model(effect(ALONE, steps_mev={"sensor": 10.0}), steps=SENSORS), ALONE)
    added = changed.activation_energy_mev - scheme_of(model(steps=SENSORS)).activation_energy_mev
    assert added == pytest.approx(40.0)


def test_side_states_beside_an_end_count_and_others_do_not() -> None:
    plain = scheme_of(model()).activation_energy_mev
    for beside, expected in (
        ("activated", -KT * log(1 + exp(50.0 / KT))),
        ("third", -KT * log(1 + exp(50.0 / KT))),
        ("rest", KT * log(1 + exp(50.0 / KT))),
        ("first", 0.0),
    ):
        sides = (SideState(name="aside", beside=beside, energy_mev=-50.0),)
        assert scheme_of(model(sides=sides)).activation_energy_mev - plain == pytest.approx(
            expected, abs=1e-10
        )


def test_raising_a_state_leaves_the_one_beside_it() -> None:
    raised = model(effect(ALONE, states_mev={"activated": 500.0}), sides=SIDES)
    expected = scheme_of(model()).activation_energy_mev - 40.0  # only the inactivated state is left there
    assert scheme_of(raised, ALONE).activation_energy_mev == pytest.approx(expected, abs=1e-6)


def test_opening_names_the_step_that_opens() -> None:
    early = scheme_of(model(opening="second", sides=SIDES))
    assert [s.open for s in early.states()] == [False, False, True, True, False, False]


def test_opening_without_charge_leaves_two_states_at_each_end() -> None:
    steps = (step("sensor", 2.0, -20.0, 4), step("opening", 0.0, 0.0))
    scheme = scheme_of(model(steps=steps, order="any"))
    assert scheme.median_mv == pytest.approx(-20.0)
    assert scheme.open_probability(0.0) == pytest.approx(0.5)


def test_number_of_states() -> None:
    assert states_number(SENSORS, "sequence") == len(scheme_of(model(steps=SENSORS)).states())
    assert states_number(SENSORS, "any") == len(scheme_of(model(steps=SENSORS, order="any")).states())
