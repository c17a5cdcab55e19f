"""What is drawn: laws of the random numbers, and each way of recording."""

from dataclasses import replace

import numpy as np
import pytest

from cornerwise import simulate
from cornerwise.campaign import Campaign
from cornerwise.mutations import named_mutation
from cornerwise.simulation import Model, Recording, scheme_of
from cornerwise.simulation.model import Common
from cornerwise.simulation.scattering import standard_deviates
from simulation.models import A, B, effect, model

QUIET = Recording(cells=3, charge_cells=3, noise=0.0, cell_sd_mv=0.0, charge_sd=0.0, gain_pc=(1.0, 1.0))
FINE = Common(decimals=15, charge_decimals=12)
SINGLES = (effect(frozenset({A}), activation_mev=80.0), effect(frozenset({B}), charge_e0=-0.5))


def numbers(campaign: Campaign, label: str) -> list[np.ndarray]:
    one = campaign.construct(label)
    return [
        *(curve.charge for curve in one.curves),
        np.array([charge.charge_e0 for charge in one.charge_replicates]),
        *(curve.open_probability for curve in one.openings),
    ]


def same(one: list[np.ndarray], other: list[np.ndarray]) -> bool:
    return all(np.array_equal(a, b) for a, b in zip(one, other, strict=True))


def test_same_seed_same_numbers_and_another_seed_others() -> None:
    made = model(*SINGLES)
    first, again, other = simulate(made), simulate(made), simulate(replace(made, seed=2))
    for label in made.genotypes:
        assert same(numbers(first, label), numbers(again, label))
        assert not same(numbers(first, label), numbers(other, label))


def test_another_construct_changes_no_number_of_the_others() -> None:
    small = model(*SINGLES)
    third = named_mutation("K50C")
    large = replace(
        small, mutations=(third, A, B), cycles=((A, third, B), (A, B)),
        effects=(*small.effects, effect(frozenset({third}), activation_mev=-30.0)),
    )  # fmt: skip
    assert len(large.genotypes) == 8
    for label in small.genotypes:
        assert same(numbers(simulate(small), label), numbers(simulate(large), label))


def test_without_scatter_curves_and_charges_are_those_of_the_scheme() -> None:
    made = model(*SINGLES, recording=QUIET, common=FINE)
    for label, mutations in made.genotypes.items():
        scheme, construct = scheme_of(made, mutations), simulate(made).construct(label)
        for curve in construct.curves:
            np.testing.assert_allclose(curve.charge, scheme.q(curve.voltage_mv), atol=1e-14)
        for charge in construct.charge_replicates:
            assert charge.charge_e0 == pytest.approx(scheme.total_charge_e0, abs=1e-11)


def test_leak_stray_holding_and_range() -> None:
    how = replace(QUIET, leak_per_mv=0.001, stray_mv=12.0, holding_mv=-90.0, first_mv=-100.0,
                  last_mv=50.0, step_mv=25.0)  # fmt: skip
    made = model(recording=how, common=FINE)
    first, _, last = simulate(made).construct("WT").curves
    np.testing.assert_array_equal(first.voltage_mv, [-100, -75, -50, -25, 0, 25, 50])
    v, scheme = first.voltage_mv, scheme_of(made)
    np.testing.assert_allclose(first.charge, scheme.q(v) + 0.001 * v, atol=1e-14)
    np.testing.assert_allclose(last.charge, scheme.q(v - 12.0) + 0.001 * v, atol=1e-14)
    assert first.holding_mv == -90.0


def test_a_construct_has_its_own_recording() -> None:
    own = {"E21A": replace(QUIET, cells=7, charge_cells=0)}
    made = simulate(model(recording=QUIET, own_recordings=own))
    counts = {c.label: (len(c.curves), len(c.charge_replicates)) for c in made.constructs}
    assert counts == {"WT": (3, 3), "E21A": (7, 0), "R84Q": (3, 3), "E21A/R84Q": (3, 3)}


def test_batches_shift_all_their_cells_in_every_construct_alike() -> None:
    how = replace(QUIET, cells=4, charge_cells=4, batches=("day 1", "day 2"))
    common = replace(FINE, batch_sd_mv=5.0, batch_charge_sd=0.1)
    made = simulate(model(recording=how, common=common))
    shifts = []
    for construct in made.constructs:
        one, two, three, four = construct.curves
        assert [c.batch for c in construct.curves] == ["day 1", "day 2", "day 1", "day 2"]
        np.testing.assert_array_equal(one.charge, three.charge)
        np.testing.assert_array_equal(two.charge, four.charge)
        shifts.append(np.trapezoid(two.charge - one.charge, one.voltage_mv))
        charges = [c.charge_e0 for c in construct.charge_replicates]
        assert charges[0] == charges[2] != charges[1] == charges[3]
    assert np.ptp(shifts) < 0.05
    assert abs(shifts[0]) > 0.5


def test_paired_charges_bear_the_names_of_cells_with_curves() -> None:
    for paired, prefix in ((True, "c"), (False, "n")):
        made = simulate(model(recording=replace(QUIET, paired=paired, charge_method="noise")))
        charges = made.construct("WT").charge_replicates
        assert [c.cell for c in charges] == [f"{prefix}01", f"{prefix}02", f"{prefix}03"]
        assert {c.method for c in charges} == {"noise"}


def test_summaries_are_mean_and_standard_error_of_the_same_draws() -> None:
    how = replace(QUIET, charge_sd=0.05, charge_cells=6)
    cells = simulate(model(recording=how, common=FINE)).construct("WT")
    (summary,) = (
        simulate(model(recording=how, common=replace(FINE, charges="summaries")))
        .construct("WT")
        .charge_summaries
    )
    values = [charge.charge_e0 for charge in cells.charge_replicates]
    assert summary.charge_e0 == pytest.approx(np.mean(values), abs=1e-11)
    assert summary.sem_e0 == pytest.approx(np.std(values, ddof=1) / np.sqrt(6), abs=1e-11)
    assert summary.n == 6


def test_openings_begin_where_they_can_be_seen() -> None:
    how = replace(QUIET, opening_cells=2, opening_noise=0.0, opening_floor=1e-4, opening_step_mv=5.0)
    made = model(recording=how)
    curve = simulate(made).construct("WT").openings[0]
    expected = scheme_of(made).open_probability(curve.voltage_mv)
    assert expected[0] >= 1e-4 > scheme_of(made).open_probability(curve.voltage_mv[0] - 5.0)
    np.testing.assert_allclose(curve.open_probability, expected, rtol=1e-5)


def test_numbers_are_rounded_as_in_the_file() -> None:
    made = simulate(model(common=Common(decimals=3, charge_decimals=2)))
    for construct in made.constructs:
        for curve in construct.curves:
            assert [float(f"{q:.3f}") for q in curve.charge] == curve.charge.tolist()
        for charge in construct.charge_replicates:
            assert float(f"{charge.charge_e0:.2f}") == charge.charge_e0


@pytest.mark.parametrize(
    ("scatter", "skewness", "kurtosis"),
    # Moments of the named distributions: gamma of shape k has skewness 2/sqrt(k), excess kurtosis 6/k;
    # Student's t with d degrees of freedom has excess kurtosis 6/(d - 4). Standard results, from memory.
    [("normal", 0.0, 0.0), ("skewed", 1.0, 1.5), ("heavy-tailed", 0.0, 6.0)],
)
def test_scatter_has_the_stated_moments(scatter: str, skewness: float, kurtosis: float) -> None:
    x = standard_deviates(scatter, np.random.default_rng(3), 1_000_000)  # type: ignore[arg-type]
    assert x.mean() == pytest.approx(0.0, abs=0.004)
    assert x.std() == pytest.approx(1.0, abs=0.005)
    assert np.mean(x**3) == pytest.approx(skewness, abs=0.25 if kurtosis > 5 else 0.02)
    assert np.mean(x**4) - 3 == pytest.approx(kurtosis, abs=3.0 if kurtosis > 5 else 0.1)


def test_scatter_of_medians_is_the_stated_one() -> None:
    how = replace(QUIET, cells=400, cell_sd_mv=3.0, step_mv=4.0)
    made: Model = model(recording=how, common=FINE)
    curves = simulate(made).construct("WT").curves
    medians = [c.voltage_mv[-1] - np.trapezoid(c.charge, c.voltage_mv) for c in curves]
    truth = scheme_of(made).median_mv
    assert np.mean(medians) == pytest.approx(truth, abs=3 * 3.0 / 20)
    assert np.std(medians, ddof=1) == pytest.approx(3.0, rel=3 / np.sqrt(2 * 399))
