"""One cycle's energy with every kind of interval, against numpy and the field's distributions."""

import math

import numpy as np
import pytest
from builders import cells, measurement
from scipy import stats

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.energies import EnergyBook
from cornerwise.estimates import estimate, estimate_all
from cornerwise.interactions import interact, interaction_draws
from cornerwise.mutations import find_cycles
from cornerwise.quantities import Summary

LABELS = ("WT", "A1G", "C2S", "D3N", "A1G/C2S", "A1G/D3N")


def _book(n: int = 5, **settings: object) -> EnergyBook:
    rng = np.random.default_rng(1)
    made = [measurement(label, cells(rng.normal(-40 + 3 * i, 2, n))) for i, label in enumerate(LABELS)]
    charge = StatedCharge(value_e0=13.0, sem_e0=0.5)
    return EnergyBook(made, Settings(**{"wild_type": "WT", "charge": charge, "replicates": 4000, **settings}))


CYCLES = find_cycles({frozenset(measurement(label, {}).construct.mutations): label for label in LABELS})


@pytest.mark.parametrize("confidence", [0.95, 0.8])
@pytest.mark.parametrize("kind", ["propagated", "monte-carlo"])
def test_every_interval_of_one_cycle(kind: str, confidence: float) -> None:
    settings = Settings(
        wild_type="WT", charge=StatedCharge(value_e0=13.0, sem_e0=0.5), interval=kind, confidence=confidence,
        replicates=4000,
    )  # fmt: skip
    book = _book()
    found, deviations = estimate(CYCLES[0], book, settings)
    interaction = interact(CYCLES[0], book, "WT")
    variance, dof = interaction.ledger.spread(interaction.energy)
    t = stats.t(dof, loc=interaction.energy.value, scale=math.sqrt(variance))
    assert (found.value, found.dof) == (interaction.energy.value, dof)
    assert found.std_uncertainty == pytest.approx(math.sqrt(variance))
    assert found.propagated == pytest.approx(t.interval(confidence))
    assert found.p_value == pytest.approx(2 * stats.t(dof).sf(abs(found.value) / math.sqrt(variance)))
    assert deviations == pytest.approx(interaction_draws(interaction, book) - found.value)
    if kind == "propagated":
        assert found.interval == found.propagated
        assert all(map(math.isnan, found.monte_carlo))
    else:
        drawn = interaction_draws(interaction, book, conservative=True)
        tail = (1 - confidence) / 2
        assert found.monte_carlo == pytest.approx(np.quantile(drawn, [tail, 1 - tail]))
        assert found.interval == found.monte_carlo


def test_single_cells_have_no_interval() -> None:
    settings = Settings(wild_type="WT", interval="monte-carlo", replicates=100)
    found, _ = estimate(CYCLES[0], _book(n=1, replicates=100), settings)
    assert not found.known
    assert all(map(math.isnan, (*found.interval, *found.propagated, *found.bootstrap, found.p_value)))


def test_all_cycles_in_their_order_with_progress() -> None:
    book, settings = _book(), Settings(wild_type="WT", replicates=4000)
    told: list[tuple[int, int]] = []
    found, deviations = estimate_all(CYCLES, book, settings, lambda done, total: told.append((done, total)))
    assert told == [(1, 2), (2, 2)]
    assert deviations.dtype == np.float32
    for cycle, one, row in zip(CYCLES, found, deviations, strict=True):
        alone, own = estimate(cycle, book, settings)
        assert (one.value, one.interval, one.known) == (alone.value, alone.interval, True)
        assert row == pytest.approx(own, abs=1e-5)
    assert len(estimate_all(CYCLES, book, settings)[0]) == 2


def test_a_summary_without_a_number_of_cells_is_normal() -> None:
    made = [measurement(label, Summary(mean=-40.0, sem=1.0, n=None)) for label in LABELS]
    stated = StatedCharge(value_e0=10.0, sem_e0=0.0)
    settings = Settings(wild_type="WT", charge=stated, replicates=100)
    found, _ = estimate(CYCLES[0], EnergyBook(made, settings), settings)
    assert math.isinf(found.dof)
    half = (found.propagated.high - found.propagated.low) / 2
    assert half == pytest.approx(stats.norm.ppf(0.975) * found.std_uncertainty)
