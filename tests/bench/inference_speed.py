"""Time and memory of everything after the medians: energies, cycles, intervals, ranks.

    python tests/bench/inference_speed.py [--large]

Medians and charges are given, so no curve is fitted. Beside it, in the same run, one call of
``scipy.stats.bootstrap`` a cycle on the same cells, its total measured on 100 cycles and scaled to all.
Seconds are those of the processor, whatever else runs. Prints a Markdown table; asserts nothing.
"""

from __future__ import annotations

import argparse
import resource
import sys
import time
from itertools import pairwise
from pathlib import Path

import numpy as np
from scipy import stats

sys.path.insert(0, str(Path(__file__).parents[1]))
from builders import cells, measurement

from cornerwise.backgrounds import background_rows
from cornerwise.campaign import Settings
from cornerwise.construct_rows import construct_row
from cornerwise.energies import EnergyBook
from cornerwise.interaction_rows import Corners, interaction_rows
from cornerwise.measurements import Measurement
from cornerwise.mutations import Corner, Cycle, parse_label
from cornerwise.planning.next_steps import next_steps

CELLS, REPLICATES = 8, 10_000
SETTINGS = Settings(wild_type="WT", replicates=REPLICATES)


def make(constructs: int, cycles: int) -> tuple[list[Measurement], list[Cycle]]:
    """A wild type, singles and doubles, each with its own cells, and cycles among them.

    For more cycles than doubles the same constructs are combined anew: nonsense as proteins, but the same
    work.
    """
    rng = np.random.default_rng(1)
    doubles = min(cycles, 6 * constructs // 7)
    singles = [f"A{10 + i}G" for i in range(constructs - 1 - doubles)]
    pairs = [(a, b) for step in range(1, len(singles)) for a, b in pairwise_at(singles, step)][:cycles]
    names = ["/".join(pair) for pair in pairs[:doubles]]
    made = [
        measurement(label, cells(rng.normal(rng.normal(-40, 8), 3, CELLS)), cells(rng.normal(13, 0.5, CELLS)))
        for label in ["WT", *singles, *names]
    ]
    return made, [_cycle(a, b, names[i % len(names)]) for i, (a, b) in enumerate(pairs)]


def pairwise_at(items: list[str], step: int) -> list[tuple[str, str]]:
    return list(zip(items, items[step:], strict=False))


def _cycle(a: str, b: str, double: str) -> Cycle:
    (one,), (other,) = parse_label(a) or (), parse_label(b) or ()
    corners = [("WT", (), 1), (a, (one,), -1), (b, (other,), -1), (double, (one, other), 1)]
    return Cycle(
        name=f"{a}/{b}",
        mutations=(one, other),
        corners=tuple(Corner(label=label, mutations=carried, sign=sign) for label, carried, sign in corners),
    )


def ours(made: list[Measurement], cycles: list[Cycle]) -> float:
    started = time.process_time()
    measured = {one.label: one for one in made}
    book = EnergyBook(made, SETTINGS)
    described = [construct_row(one, book, measured, SETTINGS) for one in made]
    corners = Corners(
        measurements=measured,
        rows={row.construct: row for row, _, _ in described},
        charges={row.construct: judged for row, _, judged in described if judged is not None},
        settings=SETTINGS,
    )
    rows, _, _ = interaction_rows(cycles, book, corners)
    background_rows(cycles, book, SETTINGS)
    next_steps(rows, cycles, book, SETTINGS)
    assert all(row.rank is not None and row.boot_low is not None for row in rows)
    return time.process_time() - started


def scipys(made: list[Measurement], cycles: list[Cycle]) -> float:
    """One bootstrap call a cycle, percentile limits of the interaction, no rank."""
    values = {one.label: one.median_mv.values * one.charge_e0.values for one in made}

    def interaction(w: np.ndarray, a: np.ndarray, b: np.ndarray, d: np.ndarray, axis: int) -> np.ndarray:
        return np.mean(w, axis=axis) - np.mean(a, axis=axis) - np.mean(b, axis=axis) + np.mean(d, axis=axis)

    started = time.process_time()
    for cycle in cycles:
        data = [values[corner.label] for corner in cycle.corners]
        stats.bootstrap(
            data, interaction, n_resamples=REPLICATES, method="percentile", vectorized=True, rng=1
        )
    return time.process_time() - started


def memory_gb() -> float:
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument(
        "--large", action="store_true", help="up to 1,000 constructs and 10,000 cycles as well"
    )
    asked = parser.parse_args()
    ours(*make(8, 3))  # imports and caches
    print(
        "| constructs | cycles | seconds | ms a cycle | peak GB | scipy bootstrap of all cycles, seconds "
        "| scipy / ours |"
    )
    print("|---|---|---|---|---|---|---|")
    sizes = [(121, 100)]
    if asked.large:
        sizes += [(1000, 1250), (1000, 2500), (1000, 5000), (1000, 10_000)]
    taken = []
    for constructs, wanted in sizes:
        made, cycles = make(constructs, wanted)
        seconds = ours(made, cycles)
        taken.append((len(cycles), seconds))
        some = cycles[:100]
        beside = scipys(made, some) * len(cycles) / len(some)
        print(
            f"| {len(made)} | {len(cycles)} | {seconds:.2f} | {1000 * seconds / len(cycles):.2f} "
            f"| {memory_gb():.2f} | {beside:.1f} | {beside / seconds:.1f} |",
            flush=True,
        )
    for (n, t), (m, u) in pairwise(taken):
        print(
            f"{n} to {m} cycles: {u / t:.2f} times the time for {m / n:.2f} times the cycles", file=sys.stderr
        )


if __name__ == "__main__":
    main()
