"""How often each kind of interval holds the true interaction energy, over a grid of simulated campaigns.

    python tests/bench/coverage.py [--campaigns 2000] [--workers 2] [--out docs/coverage.md]

Every campaign is computed by the package's own functions. Four constructs on an invented truth; cells are
normal, skewed (gamma of shape 4, skewness 1) or heavy-tailed (Student's t with 5 degrees of freedom), all
scaled to the same standard deviations; "3:1" makes the double mutant three times as noisy as the others.
In the blocked campaigns every construct is recorded in the same two or three batches, and each batch adds
an effect to the medians of all its cells with 1.5 times the standard deviation of a cell.
"""

from __future__ import annotations

import argparse
import math
import multiprocessing
import sys
import time
import zlib
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from scipy import stats

sys.path.insert(0, str(Path(__file__).parents[1]))
from builders import batched, measurement

from cornerwise.campaign import Settings
from cornerwise.energies import EnergyBook
from cornerwise.interactions import interact, interaction_draws
from cornerwise.intervals import expanded_percentile_interval, t_interval
from cornerwise.mutations import find_cycles, parse_label
from cornerwise.simulation.scattering import standard_deviates
from cornerwise.units import energy_per_e0_mv

LABELS = ("WT", "A1G", "C2S", "A1G/C2S")
SIGNS = np.array([1.0, -1.0, -1.0, 1.0])
MEDIANS_MV = np.array([-40.0, -28.0, -55.0, -35.0])
CHARGES_E0 = np.array([13.0, 12.6, 12.2, 11.5])
MEDIAN_SD_MV, CHARGE_SD_E0 = 3.0, 0.8
SHARED_PART = 0.4  # correlation of charge and median within a cell, where the same cells give both
BATCH_SD = 1.5  # of a median's standard deviation
SETTINGS = Settings(wild_type="WT", replicates=1000)
(CYCLE,) = find_cycles(
    {frozenset(parse_label(label) or () if label != "WT" else ()): label for label in LABELS}
)
SIZES = ((3,) * 4, (4,) * 4, (5,) * 4, (8,) * 4, (12,) * 4, (12, 4, 4, 3))
SHAPES = ("normal", "skewed", "heavy-tailed")
SCATTERS = ("equal", "3:1")
RECORDINGS = ("separate", "paired")


@dataclass(frozen=True, kw_only=True, slots=True)
class Case:
    """One row of the grid."""

    shape: str
    scatter: str
    sizes: tuple[int, ...]
    recording: str
    batches: str  # "none", "blocked" or "own"

    @property
    def cells(self) -> str:
        return str(self.sizes[0]) if len(set(self.sizes)) == 1 else "/".join(map(str, self.sizes))

    @property
    def seed(self) -> int:
        return zlib.crc32(repr(self).encode())


def grid() -> list[Case]:
    return [
        Case(shape=shape, scatter=scatter, sizes=sizes, recording=recording, batches=batches)
        for batches in ("none", "blocked")
        for recording in RECORDINGS
        for scatter in SCATTERS
        for shape in SHAPES
        for sizes in SIZES
    ] + [
        Case(shape=shape, scatter="equal", sizes=sizes, recording="separate", batches="own")
        for shape in SHAPES
        for sizes in ((8,) * 4, (12,) * 4)
    ]


def names_of_batches(case: Case, corner: int, n: int) -> list[str | None]:
    if case.batches == "none":
        return [None] * n
    if case.batches == "own":  # two cells a batch
        return [f"{LABELS[corner]} {i // 2}" for i in range(n)]
    count = 3 if set(case.sizes) == {3} or min(case.sizes) >= 12 else 2
    return [f"day {i % count}" for i in range(n)]


def simulate(case: Case, campaigns: int) -> tuple[list[np.ndarray], list[np.ndarray], list[list[str | None]]]:
    """Medians and charges of each corner, shape (campaigns, n), and the batch of each cell."""
    rng = np.random.default_rng(case.seed)
    medians, charges, batches = [], [], []
    effects: dict[str | None, np.ndarray] = {None: np.zeros(campaigns)}
    for corner, n in enumerate(case.sizes):
        factor = 3.0 if case.scatter == "3:1" and corner == 3 else 1.0
        v = standard_deviates(case.shape, rng, (campaigns, n))
        q = standard_deviates(case.shape, rng, (campaigns, n))
        if case.recording == "paired":
            q = SHARED_PART * v + math.sqrt(1 - SHARED_PART**2) * q
        own = names_of_batches(case, corner, n)
        for name in own:
            if name not in effects:
                effects[name] = BATCH_SD * rng.standard_normal(campaigns)
        shift = np.column_stack([effects[name] for name in own])
        medians.append(MEDIANS_MV[corner] + MEDIAN_SD_MV * (factor * v + shift))
        charges.append(CHARGES_E0[corner] + CHARGE_SD_E0 * factor * q)
        batches.append(own)
    return medians, charges, batches


def true_energy(case: Case) -> float:
    """Interaction energy in kcal/mol: of the mean of the cells' products where cells are paired."""
    products = CHARGES_E0 * MEDIANS_MV
    if case.recording == "paired":
        factors = np.array([1.0, 1.0, 1.0, 3.0 if case.scatter == "3:1" else 1.0])
        products = products + SHARED_PART * MEDIAN_SD_MV * CHARGE_SD_E0 * factors**2
    return energy_per_e0_mv("kcal/mol", SETTINGS.temperature_c) * float(np.sum(SIGNS * products))


def own_intervals(case: Case, campaigns: int) -> np.ndarray:
    """Propagated and bootstrap limits and the z limits, shape (campaigns, 6), by the package."""
    medians, charges, batches = simulate(case, campaigns)
    prefix = "c" if case.recording == "paired" else "n"
    limits = np.empty((campaigns, 6))
    for i in range(campaigns):
        made = [
            measurement(
                label, batched(v[i], own), batched(q[i], own if prefix == "c" else [None] * len(own), prefix)
            )
            for label, v, q, own in zip(LABELS, medians, charges, batches, strict=True)
        ]
        book = EnergyBook(made, SETTINGS)
        found = interact(CYCLE, book, "WT")
        spread, value = found.ledger.spread(found.energy), found.energy.value
        u = math.sqrt(spread.variance)
        limits[i, :2] = t_interval(value, u, spread.dof, 0.95)
        limits[i, 2:4] = expanded_percentile_interval(value, interaction_draws(found, book), spread.dof, 0.95)
        limits[i, 4:] = t_interval(value, u, math.inf, 0.95)
    return limits


def scipy_intervals(case: Case, campaigns: int) -> np.ndarray:
    """Percentile and BCa limits by scipy, all campaigns at once, shape (campaigns, 4)."""
    medians, charges, _ = simulate(case, campaigns)
    per = energy_per_e0_mv("kcal/mol", SETTINGS.temperature_c)
    if case.recording == "paired":
        data = [v * q for v, q in zip(medians, charges, strict=True)]
    else:
        data = [*medians, *charges]

    def interaction(*samples: np.ndarray, axis: int) -> np.ndarray:
        means = [np.mean(sample, axis=axis) for sample in samples]
        products = means if len(means) == 4 else [means[k] * means[4 + k] for k in range(4)]
        return per * (products[0] - products[1] - products[2] + products[3])

    columns = []
    for method in ("percentile", "BCa"):
        found = stats.bootstrap(
            data, interaction, axis=-1, n_resamples=999, method=method, vectorized=True, batch=50,
            rng=np.random.default_rng(case.seed),
        ).confidence_interval  # fmt: skip
        columns += [found.low, found.high]
    return np.column_stack(columns)


def coverage(task: tuple[Case, int, bool]) -> tuple[Case, list[float | None]]:
    """Share of campaigns whose limits hold the truth: ours, bootstrap, z, then percentile and BCa."""
    case, campaigns, beside = task
    truth = true_energy(case)
    limits = own_intervals(case, campaigns)
    if beside and case.batches == "none":
        limits = np.column_stack([limits, scipy_intervals(case, campaigns)])
    lows, highs = limits[:, 0::2], limits[:, 1::2]
    shares: list[float | None] = list(100 * np.mean((lows <= truth) & (truth <= highs), axis=0))
    return case, shares + [None] * (5 - len(shares))


HEADER = (
    "| batches | recording | scatter | cells | n | propagated | bootstrap | z | percentile | BCa |\n"
    "|---|---|---|---|---|---|---|---|---|---|"
)


def row(case: Case, shares: list[float | None]) -> str:
    numbers = [" - " if share is None else f"{share:.1f}" for share in shares]
    first = [case.batches, case.recording, case.scatter, case.shape, case.cells]
    return f"| {' | '.join([*first, *numbers])} |"


def outside_of_target(case: Case, shares: list[float | None]) -> list[str]:
    """Which of our two intervals miss what is asked of them."""
    few = min(case.sizes) < 4
    if case.sizes[0] > case.sizes[-1]:
        limits = {"propagated": (91.0, 97.0), "bootstrap": (90.0, 97.0)}
    elif few:
        limits = {"propagated": (93.0, 98.0)}
    else:
        limits = {"propagated": (93.5, 97.0), "bootstrap": (92.5, 97.0)}
    found = dict(zip(("propagated", "bootstrap"), shares, strict=False))
    return [
        f"{kind} {found[kind]:.1f}"
        for kind, (low, high) in limits.items()
        if not low <= (found[kind] or 0) <= high
    ]


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--campaigns", type=int, default=2000)
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--without-scipy", action="store_true", help="leave out percentile and BCa")
    parser.add_argument("--out", type=Path, help="write the table here too")
    asked = parser.parse_args()
    started = time.perf_counter()
    tasks = [(case, asked.campaigns, not asked.without_scipy) for case in grid()]
    with multiprocessing.Pool(asked.workers) as pool:
        found = pool.map(coverage, tasks, chunksize=1)
    lines = [HEADER, *(row(case, shares) for case, shares in found)]
    print("\n".join(lines))
    missed = [(case, outside_of_target(case, shares)) for case, shares in found]
    for case, which in missed:
        if which:
            print(f"outside: {case}: {', '.join(which)}", file=sys.stderr)
    print(
        f"{len(found)} cases of {asked.campaigns} in {time.perf_counter() - started:.0f} s", file=sys.stderr
    )
    if asked.out is not None:
        asked.out.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
