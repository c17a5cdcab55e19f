"""Energies and interactions against values derived by hand."""

import math

import numpy as np
import pytest
from builders import cells, measurement
from hypothesis import given
from hypothesis import strategies as st

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.energies import EnergyBook
from cornerwise.interactions import interact, interaction_draws
from cornerwise.measurements import Measurement
from cornerwise.mutations import Cycle, find_cycles
from cornerwise.quantities import Summary
from cornerwise.sources import Component, linear
from cornerwise.units import EnergyUnit

LABELS = ("WT", "A1G", "C2S", "A1G/C2S")
SIGNS = (1, -1, -1, 1)
KCAL = 23.06054783061903 / 1000  # per e0 and mV; CODATA, see reference/constants.json


def _book(measurements: list[Measurement], **settings: object) -> EnergyBook:
    return EnergyBook(measurements, Settings(**{"wild_type": "WT", "replicates": 1000, **settings}))


def _cycles(measurements: list[Measurement]) -> tuple[Cycle, ...]:
    return find_cycles({frozenset(m.construct.mutations): m.label for m in measurements})


def _summaries(
    medians: tuple[float, ...],
    sems: tuple[float, ...],
    n: int = 5,
    charges: tuple[Summary, ...] | None = None,
) -> list[Measurement]:
    return [
        measurement(label, Summary(mean=vm, sem=u, n=n), None if charges is None else charges[i])
        for i, (label, vm, u) in enumerate(zip(LABELS, medians, sems, strict=True))
    ]


def test_shared_stated_charge_enters_once() -> None:
    # I = F Q (V1 - V2 - V3 + V4): with one Q, u^2 = (F Q)^2 sum u_V^2 + (F sum s V)^2 u_Q^2.
    medians, sems = (-44.0, -48.0, -54.0, -50.0), (1.2, 1.1, 1.4, 1.0)
    book = _book(_summaries(medians, sems), charge=StatedCharge(value_e0=13.0, sem_e0=0.5))
    (cycle,) = _cycles(_summaries(medians, sems))
    found = interact(cycle, book, "WT")
    shift = -44.0 + 48.0 + 54.0 - 50.0
    assert found.energy.value == pytest.approx(KCAL * 13.0 * shift, rel=1e-12)
    by_hand = (KCAL * 13.0) ** 2 * (1.44 + 1.21 + 1.96 + 1.0) + (KCAL * shift * 0.5) ** 2
    assert book.ledger.spread(found.energy).variance == pytest.approx(by_hand, rel=1e-12)
    # Four independent charges would give (F u_Q)^2 sum V^2 instead, some seventy times as much.
    assert (KCAL * 0.5) ** 2 * sum(v * v for v in medians) > 50 * (KCAL * shift * 0.5) ** 2
    assert found.shortcut.value == pytest.approx(found.energy.value, rel=1e-12)
    assert found.shortcut_bias is None
    assert found.charge is None


def test_wild_type_shared_by_two_pairs_cancels_in_their_difference() -> None:
    # I_ab - I_cd contains the wild type as +1 - 1: its uncertainty must vanish from the difference.
    labels = ("WT", "A1G", "C2S", "D3N", "E4Q", "A1G/C2S", "D3N/E4Q")
    stated = StatedCharge(value_e0=10.0, sem_e0=0.0)
    wild = [
        measurement(label, Summary(mean=-40.0, sem=3.0 if label == "WT" else 1.0, n=6)) for label in labels
    ]
    book = _book(wild, charge=stated)
    first, second = (interact(cycle, book, "WT").energy for cycle in _cycles(wild))
    difference = linear([(1.0, first), (-1.0, second)])
    scale = (KCAL * 10.0) ** 2
    assert book.ledger.spread(first).variance == pytest.approx(scale * (9 + 3), rel=1e-12)
    assert book.ledger.spread(difference).variance == pytest.approx(scale * 6, rel=1e-12)
    big = _big(wild, stated)
    draws = [interaction_draws(interact(cycle, big, "WT"), big) for cycle in _cycles(wild)]
    assert np.var(draws[0] - draws[1]) == pytest.approx(scale * 6, rel=0.03)


def _big(measurements: list[Measurement], charge: StatedCharge) -> EnergyBook:
    return _book(measurements, charge=charge, replicates=100_000)


def test_wild_type_charge_shared_by_all_corners() -> None:
    charges = (Summary(mean=13.0, sem=0.4, n=7), None, None, None)
    medians, sems = (-40.0, -30.0, -20.0, -15.0), (1.0, 1.0, 1.0, 1.0)
    made = _summaries(medians, sems, charges=charges)
    book = _book(made, charge="wild-type")
    found = interact(_cycles(made)[0], book, "WT")
    shift = -40.0 + 30.0 + 20.0 - 15.0
    by_hand = (KCAL * 13.0) ** 2 * 4 + (KCAL * shift * 0.4) ** 2
    assert found.energy.value == pytest.approx(KCAL * 13 * shift)
    assert book.ledger.spread(found.energy).variance == pytest.approx(by_hand, rel=1e-12)
    assert {book.energies[label].charge_source for label in LABELS[1:]} == {"wild type"}


def test_own_charges_and_shortcut_bias() -> None:
    medians, sems = (-40.0, -30.0, -20.0, -15.0), (1.0, 0.8, 1.2, 0.9)
    charges = tuple(Summary(mean=q, sem=u, n=6) for q, u in ((13, 0.3), (13, 0.4), (10, 0.3), (9.5, 0.2)))
    made = _summaries(medians, sems, charges=charges)
    book = _book(made)
    found = interact(_cycles(made)[0], book, "WT")
    energies = [KCAL * q.mean * v for q, v in zip(charges, medians, strict=True)]
    interaction = sum(s * e for s, e in zip(SIGNS, energies, strict=True))
    bias = KCAL * sum(s * (q.mean - 13) * v for s, q, v in zip(SIGNS, charges, medians, strict=True))
    variance = sum(
        KCAL**2 * ((q.mean * u) ** 2 + (v * q.sem) ** 2)
        for q, v, u in zip(charges, medians, sems, strict=True)
    )
    assert found.energy.value == pytest.approx(interaction)
    assert found.shortcut_bias is not None
    assert found.shortcut_bias.value == pytest.approx(bias)
    assert found.shortcut.value == pytest.approx(interaction - bias)
    assert found.charge is not None
    assert found.charge.value == pytest.approx(13 - 13 - 10 + 9.5)
    assert book.ledger.spread(found.energy).variance == pytest.approx(variance, rel=1e-12)
    # The wild type's charge weighs (sum s V - V_wt) in the bias: its own energy and the shortcut share it.
    sensitivities = [-(-40.0 + 30.0 + 20.0 - 15.0) + -40.0, 30.0, 20.0, -15.0]
    of_charges = sum((KCAL * s * q.sem) ** 2 for s, q in zip(sensitivities, charges, strict=True))
    of_medians = sum((KCAL * (q.mean - 13) * u) ** 2 for q, u in zip(charges, sems, strict=True))
    assert book.ledger.spread(found.shortcut_bias).variance == pytest.approx(of_charges + of_medians)


@pytest.mark.parametrize("unit", ["kcal/mol", "meV"])
def test_energy_of_separate_cells_is_the_product_of_means(unit: EnergyUnit) -> None:
    rng = np.random.default_rng(1)
    v, q = rng.normal(-40, 3, 6), rng.normal(13, 1, 5)
    scale = {"kcal/mol": KCAL, "meV": 1.0}[unit]
    book = _book([measurement("WT", cells(v), cells(q, "n"))], energy_unit=unit)
    energy = book.energies["WT"].energy
    variance = (q.mean() ** 2 * np.var(v, ddof=1) / 6) + (v.mean() ** 2 * np.var(q, ddof=1) / 5)
    assert energy.value == pytest.approx(scale * q.mean() * v.mean(), rel=1e-12)
    assert book.ledger.spread(energy).variance == pytest.approx(scale**2 * variance, rel=1e-12)


def test_one_cell_that_shows_both_has_no_covariance_to_add() -> None:
    v, q = {"c0": -40.0, "a": -36.0}, {"c0": 12.0, "d": 14.0}
    energy = _book([measurement("WT", v, q)]).energies["WT"].energy
    assert energy.value == pytest.approx(KCAL * 13.0 * -38.0, rel=1e-12)


def test_energy_of_paired_cells_is_formed_cell_by_cell() -> None:
    rng = np.random.default_rng(1)
    v, q = rng.normal(-40, 3, 6), rng.normal(13, 1, 6)
    book = _book([measurement("WT", cells(v), cells(q))])
    energy = book.energies["WT"].energy
    spread = book.ledger.spread(energy)
    per_cell = KCAL * q * v
    assert energy.value == pytest.approx(per_cell.mean(), rel=1e-12)
    assert spread.variance == pytest.approx(np.var(per_cell, ddof=1) / 6, rel=1e-12)
    assert spread.dof == 5
    draws = book.energy_draws("WT")
    assert draws.mean() == pytest.approx(per_cell.mean(), abs=0.05)
    assert draws.std() == pytest.approx(per_cell.std(ddof=1) / math.sqrt(6), rel=0.1)


def test_partly_shared_cells_approach_the_paired_energy() -> None:
    rng = np.random.default_rng(2)
    v, q = rng.normal(-40, 3, 40), rng.normal(13, 1, 40)
    q += 0.2 * (v - v.mean())
    paired = _book([measurement("WT", cells(v), cells(q))]).energies["WT"].energy
    nearly = _book([measurement("WT", cells(v[:39]), cells(q))])
    energy = nearly.energies["WT"].energy
    # One cell in forty without a curve: the two formulas must nearly agree, energy and uncertainty.
    assert energy.value == pytest.approx(paired.value, rel=0.01)
    full = _book([measurement("WT", cells(v), cells(q))])
    assert nearly.ledger.spread(energy).variance == pytest.approx(
        full.ledger.spread(paired).variance, rel=0.1
    )
    assert nearly.energy_draws("WT").mean() == pytest.approx(energy.value, rel=0.01)


def test_covariance_part_is_exact_in_expectation() -> None:
    # Of 2 paired and 2 lone cells each: product of means plus (1 - S/(n m)) c is what a mean over pairs
    # of the same cells would be on average; written out for one set of numbers.
    v = {"c0": -40.0, "c1": -36.0, "a": -39.0, "b": -41.0}
    q = {"c0": 11.5, "c1": 14.5, "d": 13.0, "e": 13.5}
    book = _book([measurement("WT", v, q)])
    covariance = ((-40 + 38) * (11.5 - 13) + (-36 + 38) * (14.5 - 13)) / 1
    expected = np.mean(list(v.values())) * np.mean(list(q.values())) + covariance * (1 - 2 / 16)
    assert book.energies["WT"].energy.value == pytest.approx(KCAL * expected, rel=1e-12)


def test_voltage_offset_moves_the_interaction_by_f_u_j() -> None:
    medians, sems = (-40.0, -30.0, -20.0, -15.0), (1.0,) * 4
    charges = tuple(Summary(mean=q, sem=0.2, n=6) for q in (13.0, 13.0, 10.0, 9.0))
    made = _summaries(medians, sems, charges=charges)
    (cycle,) = _cycles(made)
    plain, offset = _book(made), _book(made, voltage_offset_mv=2.0)
    without = plain.ledger.spread(interact(cycle, plain, "WT").energy).variance
    with_it = offset.ledger.spread(interact(cycle, offset, "WT").energy).variance
    j = 13.0 - 13.0 - 10.0 + 9.0
    assert with_it - without == pytest.approx((KCAL * 2.0 * j) ** 2, rel=1e-9)
    budget = offset.ledger.budget(interact(cycle, offset, "WT").energy)
    (part,) = [part for part in budget if "offset" in part.source]
    assert part.contribution == pytest.approx(abs(KCAL * 2.0 * j))


@pytest.mark.parametrize("paired", [True, False])
def test_offset_and_truncation_reach_the_draws(paired: bool) -> None:
    rng = np.random.default_rng(5)
    v, q = rng.normal(-40, 0.01, 5), rng.normal(13, 0.001, 5)
    made = [measurement("WT", cells(v), cells(q, "c" if paired else "n"), truncation_mv=3.0)]
    book = _book(made, voltage_offset_mv=4.0, replicates=50_000)
    expected = KCAL * 13.0 * 5.0  # 3 and 4 mV in squares
    assert book.energy_draws("WT").std() == pytest.approx(expected, rel=0.02)
    assert math.sqrt(book.ledger.spread(book.energies["WT"].energy).variance) == pytest.approx(
        expected, rel=0.01
    )


def test_never_measured_charge_is_taken_from_the_wild_type_once() -> None:
    charges = (Summary(mean=13.0, sem=0.4, n=7), Summary(mean=12.0, sem=0.3, n=5), None, None)
    made = _summaries((-40.0, -30.0, -20.0, -15.0), (1.0,) * 4, charges=charges)
    book = _book(made)
    found = interact(_cycles(made)[0], book, "WT")
    assert found.charge is None
    assert found.shortcut_bias is None
    of_wild_type_charge = KCAL * (-40.0 + 20.0 - 15.0) * 0.4
    variance = (KCAL**2) * (3 * 13.0**2 + 12.0**2) + of_wild_type_charge**2 + (KCAL * 30.0 * 0.3) ** 2
    assert book.ledger.spread(found.energy).variance == pytest.approx(variance, rel=1e-12)


finite = st.floats(-80, 80)
numbers = st.lists(st.floats(-80, 80), min_size=3, max_size=6)
positive = st.lists(st.floats(5, 20), min_size=3, max_size=6)


@given(
    medians=st.tuples(numbers, numbers, numbers, numbers),
    charges=st.tuples(positive, positive, positive, positive),
    v=finite,
    paired=st.booleans(),
)
def test_common_voltage_shift_adds_f_v_j(medians: tuple, charges: tuple, v: float, paired: bool) -> None:
    prefix = "c" if paired else "n"
    kept = [min(len(m), len(q)) for m, q in zip(medians, charges, strict=True)]
    made, moved = (
        [
            measurement(label, cells([x + shift for x in m[:k]]), cells(q[:k], prefix))
            for label, m, q, k in zip(LABELS, medians, charges, kept, strict=True)
        ]
        for shift in (0.0, v)
    )
    (cycle,) = _cycles(made)
    before, after = interact(cycle, _book(made), "WT"), interact(cycle, _book(moved), "WT")
    assert before.charge is not None
    expected = before.energy.value + KCAL * v * before.charge.value
    assert after.energy.value == pytest.approx(expected, abs=1e-9)


@given(a=finite, b=finite, wild_type=finite, u=st.floats(0.1, 5))
def test_additive_cycle_has_no_interaction(a: float, b: float, wild_type: float, u: float) -> None:
    medians = (wild_type, wild_type + a, wild_type + b, wild_type + a + b)
    made = _summaries(medians, (u,) * 4)
    book = _book(made, charge=StatedCharge(value_e0=12.0, sem_e0=0.3))
    assert interact(_cycles(made)[0], book, "WT").energy.value == pytest.approx(0.0, abs=1e-10)


@given(medians=st.tuples(numbers, numbers, numbers, numbers))
def test_swapping_the_singles_changes_nothing(medians: tuple) -> None:
    stated = StatedCharge(value_e0=12.0, sem_e0=0.3)
    made = [measurement(label, cells(m)) for label, m in zip(LABELS, medians, strict=True)]
    swapped = [made[0], measurement("A1G", cells(medians[2])), measurement("C2S", cells(medians[1])), made[3]]
    one, other = (
        (book := _book(constructs, charge=stated), interact(_cycles(constructs)[0], book, "WT").energy)
        for constructs in (made, swapped)
    )
    assert one[1].value == pytest.approx(other[1].value, abs=1e-10)
    assert one[0].ledger.spread(one[1]) == pytest.approx(other[0].ledger.spread(other[1]), rel=1e-9)


def test_third_order_is_the_change_of_a_pair_between_backgrounds() -> None:
    labels = ("WT", "A1G", "C2S", "D3N", "A1G/C2S", "A1G/D3N", "C2S/D3N", "A1G/C2S/D3N")
    values = (-40.0, -33.0, -51.0, -42.0, -30.0, -31.0, -49.0, -20.0)
    made = [
        measurement(label, Summary(mean=v, sem=1.0, n=5)) for label, v in zip(labels, values, strict=True)
    ]
    book = _book(made, charge=StatedCharge(value_e0=10.0, sem_e0=0.0))
    *_, triple = _cycles(made)
    assert triple.order == 3
    in_wild_type = -40.0 + 33.0 + 51.0 - 30.0
    in_third_mutant = -42.0 + 31.0 + 49.0 - 20.0
    found = interact(triple, book, "WT").energy
    assert found.value == pytest.approx(KCAL * 10 * (in_third_mutant - in_wild_type))
    assert book.ledger.spread(found).variance == pytest.approx((KCAL * 10) ** 2 * 8)


def test_draws_of_paired_cells_are_resampled_products() -> None:
    rng = np.random.default_rng(3)
    v, q = rng.normal(-40, 8, 6), rng.normal(13, 2, 6)
    book = _book([measurement("WT", cells(v), cells(q))])
    by_cell = book.ledger.draws(Component("charge x median", "WT"))
    assert book.energy_draws("WT") == pytest.approx(KCAL * by_cell, rel=1e-12)


@pytest.mark.parametrize("paired", [True, False])
@pytest.mark.parametrize("conservative", [True, False])
def test_draws_lie_around_the_energy_at_the_reference_voltage(conservative: bool, paired: bool) -> None:
    rng = np.random.default_rng(4)
    v, q = rng.normal(-40, 0.5, 8), rng.normal(13, 0.1, 8)
    made = [measurement("WT", cells(v), cells(q, "c" if paired else "n"))]
    book = _book(made, reference_voltage_mv=-60.0, replicates=20_000)
    energy = book.energies["WT"].energy
    assert energy.value == pytest.approx(KCAL * 13 * 20, rel=0.02)
    drawn = book.energy_draws("WT", conservative=conservative)
    assert drawn.mean() == pytest.approx(energy.value, abs=0.01)
    # The reference voltage meets the same drawn charge: Q (V - Vref) and not Q V - constant.
    assert drawn.std() == pytest.approx(math.sqrt(book.ledger.spread(energy).variance), rel=0.25)


@pytest.mark.parametrize("paired", [True, False])
def test_an_offset_moves_the_draws_the_way_it_moves_the_energy(paired: bool) -> None:
    rng = np.random.default_rng(5)
    v, q = rng.normal(-40, 0.01, 5), rng.normal(13, 0.001, 5)
    book = _book([measurement("WT", cells(v), cells(q, "c" if paired else "n"))], voltage_offset_mv=2.0)
    offset = book.ledger.draws(Component("voltage offset"))
    moved = book.energy_draws("WT") - book.energies["WT"].energy.value
    sensitivity = book.energies["WT"].energy.sensitivities[Component("voltage offset")]
    assert sensitivity == pytest.approx(KCAL * 13.0, rel=1e-3)
    assert moved == pytest.approx(sensitivity * offset, abs=0.02)


def test_draws_of_partly_shared_cells_hold_their_covariance() -> None:
    v = {"c0": -60.0, "c1": -20.0, "a": -39.0, "b": -41.0}
    q = {"c0": 10.0, "c1": 16.0, "d": 13.0, "e": 13.5}
    book = _book([measurement("WT", v, q)], replicates=200_000)
    covariance, means = 120.0, -40.0 * 13.125
    # The mean of the products of resampled means adds cov(mean v, mean q): 2 of 4 x 4 cells.
    expected = KCAL * (means + covariance * (1 - 2 / 16) + covariance * 2 / 16 / (4 / 3))
    assert book.energy_draws("WT").mean() == pytest.approx(expected, abs=0.1)


def test_sources_are_called_what_they_are() -> None:
    made = _summaries((-44.0, -48.0, -54.0, -50.0), (1.2, 1.1, 1.4, 1.0))
    book = _book(made, charge=StatedCharge(value_e0=13.0, sem_e0=0.5), voltage_offset_mv=1.0)
    names = {source.name for source in book.ledger.sources}
    assert "stated total charge, shared by all constructs" in names
    assert "voltage offset, common to all curves" in names
    assert book.ledger.draws(Component("voltage offset")).mean() == pytest.approx(0.0, abs=0.15)
    without = _book(made, charge=StatedCharge(value_e0=13.0, sem_e0=0.5))
    assert "voltage offset, common to all curves" not in {source.name for source in without.ledger.sources}
    paired = _book([measurement("WT", cells([-40.0, -41.0, -42.0]), cells([13.0, 12.0, 12.5]))])
    assert "cells of WT (median and charge)" in {source.name for source in paired.ledger.sources}


def test_a_construct_without_a_usable_cell_has_no_energy_and_says_so() -> None:
    stated = StatedCharge(value_e0=13.0, sem_e0=0.5)
    book = _book([measurement("WT", {}), measurement("A1G", cells([-40.0, -41.0]))], charge=stated)
    (source,) = [one for one in book.ledger.sources if Component("median", "WT") in one.components]
    assert "WT" in source.name
    energy = book.energies["WT"].energy
    assert math.isnan(energy.value)
    assert math.isnan(book.ledger.spread(energy).variance)
    assert np.isnan(book.ledger.draws(Component("median", "WT"))).all()
    assert math.isfinite(book.energies["A1G"].energy.value)


def test_stated_charge_at_a_reference_voltage_in_units_of_kt() -> None:
    made = [measurement("WT", cells([-40.0, -42.0]), truncation_mv=3.0)]
    stated = StatedCharge(value_e0=13.0, sem_e0=0.5)
    book = _book(made, charge=stated, reference_voltage_mv=-60.0, energy_unit="kT", temperature_c=25.0)
    energy = book.energies["WT"]
    assert energy.charge_source == "stated"
    assert energy.median.value == -41.0  # what was extrapolated is an uncertainty, no shift
    kt_mv = 1.380649e-23 * 298.15 / 1.602176634e-19 * 1000  # exact in the SI, values from memory
    assert energy.energy.value == pytest.approx(13.0 * (-41.0 + 60.0) / kt_mv, rel=1e-9)


def test_no_charge_at_all_is_told_with_the_construct() -> None:
    with pytest.raises(KeyError, match="no total charge is known for WT or for the wild type"):
        _book([measurement("WT", cells([-40.0, -42.0]))])
