"""Donors and days: which rule is used, and what it gives, against least squares written out."""

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest
import statsmodels.api as sm
from builders import batched, campaign, construct, measurement
from scipy import stats

from cornerwise.batches import Units, alone, regroup, units_notes
from cornerwise.blocks import Blocks
from cornerwise.campaign import Settings, StatedCharge
from cornerwise.charge_judgement import compared_charges
from cornerwise.coupling import couple
from cornerwise.energies import EnergyBook
from cornerwise.interactions import Interaction, interact, interaction_draws
from cornerwise.measurements import Measurement
from cornerwise.mutations import find_cycles

LABELS = ("WT", "A1G", "C2S", "A1G/C2S")
SIGNS = np.array([1.0, -1.0, -1.0, 1.0])
MEANS = (-40.0, -33.0, -51.0, -41.0)
SCALE = 23.06054783061903 / 1000 * 10.0  # kcal/mol per mV at 10 e0; CODATA, see reference/constants.json
TEN = StatedCharge(value_e0=10.0, sem_e0=0.0)


def _made(
    batches: Sequence[Sequence[str]], effects: dict[str, float] | None = None, seed: int = 1, sd: float = 1.0
) -> list[Measurement]:
    """Four constructs, the batch of each cell, and what each batch adds to a median."""
    rng = np.random.default_rng(seed)
    return [
        measurement(
            label,
            batched([mean + (effects or {}).get(b, 0.0) + rng.normal(0, sd) for b in own], own),
        )
        for label, mean, own in zip(LABELS, MEANS, batches, strict=True)
    ]


def _interaction(made: list[Measurement], **settings: object) -> tuple[Interaction, EnergyBook]:
    book = EnergyBook(made, Settings(**{"wild_type": "WT", "charge": TEN, "replicates": 20_000, **settings}))
    (cycle,) = find_cycles({frozenset(m.construct.mutations): m.label for m in made})
    return interact(cycle, book, "WT"), book


def _least_squares(made: list[Measurement]) -> tuple[float, float, int]:
    """Contrast, its standard error under equal variances and the degrees of freedom, by another program."""
    y = np.concatenate([SCALE * m.median_mv.values for m in made])
    construct_of = np.repeat(np.arange(4), [m.median_mv.n for m in made])
    batch = [b for m in made for b in m.median_mv.batches]
    names = sorted(set(batch))
    dummies = [[float(b == name) for name in names[1:]] for b in batch]
    fit = sm.OLS(y, np.column_stack([np.eye(4)[construct_of], dummies])).fit()
    contrast = fit.t_test(np.concatenate([SIGNS, np.zeros(len(names) - 1)]))
    return float(contrast.effect[0]), float(contrast.sd[0, 0]), int(fit.df_resid)


BLOCKED = [["d1", "d1", "d2", "d2", "d3", "d3"]] * 4
INCOMPLETE = [["d1", "d1", "d2", "d3"], ["d1", "d2", "d2"], ["d2", "d3", "d3"], ["d1", "d3", "d3", "d3"]]
OWN = [["a", "a", "b", "b"], ["c", "c", "d"], ["e", "f", "f"], ["g", "g", "h", "h"]]


def test_complete_blocks_are_least_squares_on_construct_and_batch() -> None:
    made = _made(BLOCKED, {"d1": 6.0, "d3": -4.0})
    found, _ = _interaction(made)
    value, u, _ = _least_squares(made)
    assert [units.rule for units in found.units] == ["within batches"]
    assert found.units[0].reason == "the constructs share their batches, whose effects cancel"
    assert found.energy.value == pytest.approx(value, rel=1e-10)
    # In complete blocks the sum over constructs of q SS/nu is the pooled variance, whatever each scatter.
    assert math.sqrt(found.ledger.spread(found.energy).variance) == pytest.approx(u, rel=1e-10)
    plain = SCALE * float(np.sum(SIGNS * [m.median_mv.mean for m in made]))
    assert found.energy.value == pytest.approx(plain, rel=1e-12)


def test_incomplete_blocks_take_the_least_squares_estimate() -> None:
    made = _made(INCOMPLETE, {"d1": 6.0, "d3": -4.0})
    found, _ = _interaction(made)
    value, _, _ = _least_squares(made)
    assert [units.rule for units in found.units] == ["within batches"]
    assert found.energy.value == pytest.approx(value, rel=1e-10)
    plain = SCALE * float(np.sum(SIGNS * [m.median_mv.mean for m in made]))
    assert found.energy.value != pytest.approx(plain, rel=1e-3)


@pytest.mark.parametrize("batches", [BLOCKED, INCOMPLETE])
def test_a_batch_effect_cancels_exactly(batches: Sequence[Sequence[str]]) -> None:
    before, _ = _interaction(_made(batches))
    after, _ = _interaction(_made(batches, {"d1": 30.0, "d2": -7.0}))
    assert after.energy.value == pytest.approx(before.energy.value, abs=1e-9)
    assert after.ledger.spread(after.energy) == pytest.approx(before.ledger.spread(before.energy), rel=1e-8)


def test_variance_and_degrees_of_freedom_written_out() -> None:
    made = _made(INCOMPLETE)
    found, _ = _interaction(made)
    y = np.concatenate([SCALE * m.median_mv.values for m in made])
    own = np.repeat(np.arange(4), [m.median_mv.n for m in made])
    batch = np.array([b for m in made for b in m.median_mv.batches])
    x = np.column_stack([np.eye(4)[own], *[(batch == name).astype(float) for name in ("d2", "d3")]])
    hat = x @ np.linalg.inv(x.T @ x) @ x.T
    weights = x @ np.linalg.inv(x.T @ x) @ np.concatenate([SIGNS, [0, 0]])
    residuals = y - hat @ y
    parts, dofs = [], []
    for k in range(4):
        nu = float(np.sum(1 - np.diag(hat)[own == k]))
        parts.append(np.sum(weights[own == k] ** 2) * np.sum(residuals[own == k] ** 2) / nu)
        dofs.append(nu)
    spread = found.ledger.spread(found.energy)
    assert spread.variance == pytest.approx(sum(parts), rel=1e-10)
    assert spread.dof == pytest.approx(
        sum(parts) ** 2 / sum(p * p / nu for p, nu in zip(parts, dofs, strict=True)), rel=1e-10
    )
    names = [part.source for part in found.ledger.budget(found.energy) if part.share > 0]
    assert len(names) == 4
    assert all("within 3 batches" in name for name in names)


def test_own_batches_make_batch_means_the_units() -> None:
    made = _made(OWN)
    found, _ = _interaction(made)
    (units,) = found.units
    assert (units.rule, units.cells, units.batches) == ("batch means", 14, 8)
    assert units.reason == "the constructs do not share their batches"
    means = [
        [np.mean([v for v, b in zip(m.median_mv.values, m.median_mv.batches, strict=True) if b == name])
         for name in sorted(set(m.median_mv.batches))]
        for m in made
    ]  # fmt: skip
    variances = [np.var(one, ddof=1) / 2 for one in means]
    spread = found.ledger.spread(found.energy)
    assert found.energy.value == pytest.approx(SCALE * np.sum(SIGNS * [np.mean(one) for one in means]))
    assert spread.variance == pytest.approx(SCALE**2 * sum(variances))
    assert spread.dof == pytest.approx(sum(variances) ** 2 / sum(v * v for v in variances))


def test_a_single_batch_at_one_corner_leaves_cells() -> None:
    found, _ = _interaction(_made([["x", "x", "x"], *OWN[1:]]))
    (units,) = found.units
    assert units.rule == "cells"
    assert units.reason == "a construct has a single batch, so differences between batches are left out"
    assert found.ledger.spread(found.energy).dof > 3


@pytest.mark.parametrize("batches", [[[None] * 4] * 4, [["d1", "d2", None, "d1"], *[["d1", "d2", "d2"]] * 3]])
def test_cells_where_batches_are_not_all_stated(batches: list) -> None:
    made = _made(batches)
    found, book = _interaction(made)
    plain = sum(SCALE**2 * np.var(m.median_mv.values, ddof=1) / m.median_mv.n for m in made)
    assert {units.rule for units in found.units} == {"cells"}
    unstated = all(batch is None for own in batches for batch in own)
    assert {units.reason for units in found.units} == {"" if unstated else "some cells have no batch"}
    assert found.ledger is book.ledger
    assert found.ledger.spread(found.energy).variance == pytest.approx(plain)


def test_cells_of_one_batch() -> None:
    found, book = _interaction(_made([["x", "x", "x"]] * 4))
    assert [(u.rule, u.batches, u.reason) for u in found.units] == [
        ("cells", 1, "all cells come from one batch")
    ]
    assert found.ledger is book.ledger


def test_cells_where_only_some_show_both_numbers() -> None:
    made = []
    for label, mean in zip(LABELS, MEANS, strict=True):
        days = ["d1", "d1", "d2", "d2"]
        medians = batched([mean, mean + 1, mean - 1, mean + 2], days)
        charges = batched([13.0, 13.4, 12.8], days[:3])
        made.append(measurement(label, medians, charges))
    found, book = _interaction(made, charge="measured")
    assert [(u.family, u.rule, u.reason) for u in found.units] == [
        ("paired cells", "cells", "only some cells show both charge and median")
    ]
    assert found.ledger is book.ledger


def test_two_halves_that_share_batches_each_are_still_within() -> None:
    # Wild type with one single, the other single with the double: the batches of each half cancel.
    halves = [["a", "b", "b"], ["a", "a", "b"], ["c", "d", "d"], ["c", "c", "d"]]
    before, _ = _interaction(_made(halves))
    after, _ = _interaction(_made(halves, {"a": 9.0, "d": -5.0}))
    assert before.units[0].rule == "within batches"
    assert after.energy.value == pytest.approx(before.energy.value, abs=1e-9)
    # Wild type with the double cancels nothing: both enter with a plus.
    crossed = [halves[0], halves[2], halves[3], halves[1]]
    assert _interaction(_made(crossed))[0].units[0].rule == "batch means"


def test_paired_cells_cancel_batches_in_energy_and_charge() -> None:
    rng = np.random.default_rng(4)
    made = []
    for label, mean in zip(LABELS, MEANS, strict=True):
        batches = ["d1", "d1", "d2", "d2"]
        medians = batched(rng.normal(mean, 1, 4), batches)
        charges = batched(rng.normal(13, 0.4, 4) + np.array([0.5, 0.5, -0.5, -0.5]), batches)
        made.append(measurement(label, medians, charges))
    found, _ = _interaction(made, charge="measured")
    assert [(u.family, u.rule) for u in found.units] == [("paired cells", "within batches")]
    assert found.charge is not None
    within = found.ledger.spread(found.charge).variance
    plain = sum(np.var(m.charge_e0.values, ddof=1) / 4 for m in made)
    assert within < plain
    assert found.shortcut_bias is not None
    assert found.shortcut_bias.value == pytest.approx(found.energy.value - found.shortcut.value)


@pytest.mark.parametrize("batches", [BLOCKED, INCOMPLETE, OWN])
def test_bootstrap_has_the_spread_of_the_rule_in_force(batches: Sequence[Sequence[str]]) -> None:
    found, book = _interaction(_made(batches, seed=3), replicates=100_000)
    draws = interaction_draws(found, book)
    assert draws.mean() == pytest.approx(found.energy.value, abs=0.01)
    assert draws.std() == pytest.approx(math.sqrt(found.ledger.spread(found.energy).variance), rel=0.01)


def test_a_construct_alone_counts_batches_only_when_they_are_its_own() -> None:
    made = _made([BLOCKED[0], BLOCKED[0], *OWN[2:]])
    book = EnergyBook(made, Settings(wild_type="WT", charge=TEN))
    assert book.shared_batches == {"d1", "d2", "d3"}
    _, (shared,) = alone(book.ledger, "WT", book.shared_batches)
    ledger, (own,) = alone(book.ledger, "A1G/C2S", book.shared_batches)
    assert (shared.rule, own.rule) == ("cells", "batch means")
    assert shared.reason == "other constructs share the batches, so it holds for the batches recorded"
    assert own.reason == "it has batches of its own"
    energy = book.energies["A1G/C2S"].energy
    values = made[3].median_mv.values
    halves = np.array([values[:2].mean(), values[2:].mean()])
    assert ledger.spread(energy).variance == pytest.approx(SCALE**2 * np.var(halves, ddof=1) / 2)


def test_a_charge_that_only_one_corner_has_is_no_comparison() -> None:
    made = _made(BLOCKED)
    charges = batched([13.0, 13.4, 12.8, 13.1], ["p", "p", "q", "q"], "n")
    made[0] = measurement("WT", made[0].median_mv, charges)
    found, _ = _interaction(made, charge="wild-type")
    assert [(u.family, u.rule) for u in found.units] == [
        ("medians", "within batches"),
        ("charges", "batch means"),
    ]


def test_blocks_without_a_cell_to_spare_have_no_scatter() -> None:
    made = _made([["a"], ["a"], ["a"], ["a"]])
    book = EnergyBook(made, Settings(wild_type="WT", charge=TEN))
    corners = [book.ledger.sources[i] for i in range(4)]
    assert not Blocks(corners, SIGNS).has_scatter
    ledger, (units,) = regroup(book.ledger, list(zip(LABELS, SIGNS, strict=True)))
    assert (ledger, units.rule) == (book.ledger, "cells")


def test_the_rule_is_told_in_the_notes() -> None:
    rng = np.random.default_rng(6)
    days = ["day 1", "day 1", "day 2", "day 2"]
    constructs = [
        construct(label, list(rng.normal(mean, 1.5, 4)), batches=days)
        for label, mean in zip(LABELS, MEANS, strict=True)
    ]
    result = couple(campaign(constructs, charge=TEN))
    (row,) = result.interactions
    assert [units.rule for units in row.units] == ["within batches"]
    told = [note for note in result.notes if note.startswith("interaction of A1G/C2S")]
    assert len(told) == 1
    assert "formed within batches" in told[0]
    assert "(2 batches, 16 cells)" in told[0]
    assert any("energy of WT, A1G and 2 more" in note for note in result.notes)


def test_no_batch_no_note() -> None:
    found, _ = _interaction(_made([[None] * 3] * 4))
    assert units_notes("interaction", [("A1G/C2S", found.units)]) == ()


@pytest.mark.parametrize("rule", ["within", "means"])
def test_coverage_with_batch_effects_of_twice_the_scatter(rule: str) -> None:
    # 400 campaigns: 95 % to within three standard errors of a simulated coverage (1.1 %), a little wider
    # for the conservative side of few batches.
    batches = (
        BLOCKED if rule == "within" else [[f"{k}{b}" for b in range(4) for _ in range(2)] for k in range(4)]
    )
    truth = SCALE * float(np.sum(SIGNS * np.array(MEANS)))
    rng = np.random.default_rng(8)
    covered = 0
    for seed in range(400):
        names = {b for own in batches for b in own}
        effects = {name: float(rng.normal(0, 2)) for name in sorted(names)}
        found, _ = _interaction(_made(batches, effects, seed=seed), replicates=10)
        covered += not found.energy.interval(found.ledger, 0.95).excludes(truth)
    assert 0.92 <= covered / 400 <= 0.99
    assert stats.binomtest(covered, 400, 0.95).pvalue > 1e-4


@pytest.mark.parametrize(
    ("cycles", "sizes", "told"),
    [
        (
            ["A1G/C2S"],
            [(2, 16)],
            "interaction of A1G/C2S (medians): shared; cells are the units (2 batches, 16 cells)",
        ),
        (
            ["one", "two", "two", "three"],
            [(1, 1), (1, 1), (1, 1), (1, 1)],
            "interaction of one, two, three (medians): shared; cells are the units (1 batch, 1 cell)",
        ),
        (
            ["one", "two", "three", "four"],
            [(1, 8), (3, 6), (2, 9), (2, 9)],
            "interaction of one, two and 2 more (medians): shared; cells are the units "
            "(1 to 3 batches, 6 to 9 cells)",
        ),
    ],
)
def test_notes_name_few_and_count_many(cycles: list[str], sizes: list[tuple[int, int]], told: str) -> None:
    counted = [
        (name, (Units(family="medians", rule="cells", cells=cells, batches=batches, reason="shared"),))
        for name, (batches, cells) in zip(cycles, sizes, strict=True)
    ]
    assert units_notes("interaction", counted) == (told,)


def test_notes_keep_families_of_one_rule_together_and_rules_apart() -> None:
    medians = Units(family="medians", rule="cells", cells=8, batches=2, reason="shared")
    charges = replace(medians, family="charges")
    own = replace(charges, rule="batch means", reason="own")
    notes = units_notes("energy", [("WT", (medians, charges)), ("A1G", (medians, own))])
    assert notes == (
        "energy of WT, A1G (medians and charges): shared; cells are the units (2 batches, 8 cells)",
        "energy of A1G (charges): own; batch means are the units (2 batches, 8 cells)",
    )


@pytest.mark.parametrize("paired", [True, False])
def test_a_ratio_of_charges_does_not_depend_on_which_construct_is_paired(paired: bool) -> None:
    # Charges of the mutant come from the cells of its curves or from others; the wild type's from others.
    # The days are shared, so no two of them stand for all days: cells are counted, not day means.
    rng = np.random.default_rng(9)
    days = ["d1", "d1", "d1", "d2", "d2"]
    charges = [rng.normal(13, 0.5, 5) + np.array([0.4] * 3 + [-0.4] * 2) for _ in range(2)]
    made = [
        measurement(
            label,
            batched(rng.normal(mean, 1, 5), days, f"{label} "),
            batched(own, days, f"{label} " if paired and label == "A1G" else f"{label} n"),
        )
        for label, mean, own in zip(("WT", "A1G"), MEANS, charges, strict=False)
    ]
    book = EnergyBook(made, Settings(wild_type="WT", charge="measured", replicates=100))
    found = compared_charges("A1G", book, "WT")
    assert found is not None
    logarithm, ledger = found
    spread = ledger.spread(logarithm)
    relative = [q / q.mean() for q in charges]
    variances = [np.var(q, ddof=1) / 5 for q in relative]
    if paired:
        assert spread.variance == pytest.approx(sum(variances))
        assert spread.dof == pytest.approx(sum(variances) ** 2 / sum(v * v / 4 for v in variances))
    else:  # within days, whose effects cancel
        assert spread.dof > 4
        assert spread.variance < sum(variances)
    assert logarithm.value == pytest.approx(math.log(charges[1].mean() / charges[0].mean()), abs=1e-9)
