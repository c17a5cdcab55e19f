"""Twenty pairs on one wild type: false verdicts, rank limits, first places and shrunken estimates.

    python tests/bench/many_pairs.py [--campaigns 2000] [--cells 5] [--workers 2]

Every campaign is computed by the package's own functions from simulated cells (normal; medians scatter by 3
mV, the total charge is stated). A verdict is false where a pair without any interaction is called coupled
or detected; the strongest is the pair whose estimate is the largest. Prints a Markdown table; asserts
nothing.
"""

from __future__ import annotations

import argparse
import multiprocessing
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))
from builders import cells, measurement

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.energies import EnergyBook
from cornerwise.estimates import estimate_all
from cornerwise.mutations import find_cycles
from cornerwise.standings import standings
from cornerwise.units import energy_per_e0_mv
from cornerwise.verdicts import interaction_verdict

PAIRS = 20
CHARGE_E0, SD_MV = 13.0, 3.0
SETTINGS = Settings(
    wild_type="WT", replicates=2000, charge=StatedCharge(value_e0=CHARGE_E0, sem_e0=0.0), simultaneous=True
)
PER_MV = energy_per_e0_mv("kcal/mol", SETTINGS.temperature_c) * CHARGE_E0


def truth(scenario: str, rng: np.random.Generator) -> np.ndarray:
    """True interactions in mV."""
    if scenario == "none":
        return np.zeros(PAIRS)
    if scenario == "five of 12 mV":
        return np.where(np.arange(PAIRS) < PAIRS // 4, 12.0 * rng.choice([-1, 1], PAIRS), 0.0)
    if scenario == "normal, SD 4 mV":
        return rng.normal(0, 4.0, PAIRS)
    return np.linspace(1.0, 20.0, PAIRS) * rng.choice([-1, 1], PAIRS)  # "sizes 1 to 20 mV"


SCENARIOS = ("none", "five of 12 mV", "normal, SD 4 mV", "sizes 1 to 20 mV")  # the true interactions


def one_campaign(scenario: str, n: int, seed: int) -> dict[str, float]:
    rng = np.random.default_rng([SCENARIOS.index(scenario), n, seed])
    interactions = truth(scenario, rng)
    made = [measurement("WT", cells(rng.normal(-40, SD_MV, n)))]
    for pair, interaction in enumerate(interactions):
        a, b = f"E{10 + pair}Q", f"R{100 + pair}Q"
        shift_a, shift_b = rng.normal(0, 8, 2)
        for label, mean in ((a, shift_a), (b, shift_b), (f"{a}/{b}", shift_a + shift_b + interaction)):
            made.append(measurement(label, cells(rng.normal(-40 + mean, SD_MV, n))))
    cycles = find_cycles({frozenset(m.construct.mutations): m.label for m in made})
    found, deviations = estimate_all(cycles, EnergyBook(made, SETTINGS), SETTINGS)
    places = [int(str(cycle.mutations[0])[1:-1]) - 10 for cycle in cycles]
    true = PER_MV * interactions[places]
    standing = standings(found, deviations, SETTINGS)
    sizes = np.abs(true)
    above = np.array([1 + np.sum(sizes > size + 1e-12) for size in sizes])
    below = np.array([np.sum(sizes >= size - 1e-12) for size in sizes])
    limits = np.array([one.ranks for one in standing])
    verdicts = [
        interaction_verdict(one.interval, SETTINGS.energy_threshold, established=place.established)
        for one, place in zip(found, standing, strict=True)
    ]
    positive = np.array([verdict in ("coupled", "detected") for verdict in verdicts])
    first = np.array([one.first_probability for one in standing])
    values, shrunken = np.array([one.value for one in found]), np.array([one.shrunken for one in standing])
    null, top = sizes == 0, int(np.argmax(np.abs(values)))
    chosen = np.argsort(-first, kind="stable")[: SETTINGS.first]
    return {
        "campaigns with a false verdict": _any_of(null, positive),
        "campaigns with one, p not adjusted": _any_of(
            null, np.array([one.interval.excludes(0.0) for one in found])
        ),
        "all simultaneous intervals hold": float(
            all(not one.simultaneous.excludes(t) for one, t in zip(standing, true, strict=True))
        ),
        "rank limits hold": float(np.mean((limits[:, 0] <= above) & (below <= limits[:, 1]))),
        "rank limits of the strongest hold": float(
            limits[top, 0] <= above[top] and below[top] <= limits[top, 1]
        ),
        "width of rank limits": float(np.mean(limits[:, 1] - limits[:, 0] + 1)),
        "bias of the strongest": float(abs(values[top]) - np.sign(values[top]) * true[top]),
        "bias of the strongest, shrunken": float(abs(shrunken[top]) - np.sign(values[top]) * true[top]),
        "squared error": float(np.mean((values - true) ** 2)),
        "squared error, shrunken": float(np.mean((shrunken - true) ** 2)),
        "probability of being among the first, said": float(np.mean(first[chosen])),
        "share truly among the first": float(np.mean(above[chosen] <= SETTINGS.first)),
    }


def _any_of(null: np.ndarray, shown: np.ndarray) -> float:
    """1 if any pair without an interaction is shown to have one; NaN where all have one."""
    return float(np.any(null & shown)) if null.any() else float("nan")


def run(task: tuple[str, int, int, int]) -> list[dict[str, float]]:
    scenario, n, start, stop = task
    return [one_campaign(scenario, n, seed) for seed in range(start, stop)]


def _printed(share: float) -> str:
    return "-" if np.isnan(share) else f"{share:.3f}"


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--campaigns", type=int, default=2000)
    parser.add_argument("--cells", type=int, default=5)
    parser.add_argument("--workers", type=int, default=2)
    asked = parser.parse_args()
    started = time.perf_counter()
    columns = []
    with multiprocessing.Pool(asked.workers) as pool:
        for scenario in SCENARIOS:
            bounds = range(0, asked.campaigns, 50)
            tasks = [(scenario, asked.cells, i, min(i + 50, asked.campaigns)) for i in bounds]
            found = [one for some in pool.map(run, tasks, chunksize=1) for one in some]
            columns.append({key: float(np.mean([one[key] for one in found])) for key in found[0]})
    print(f"| {PAIRS} pairs, n = {asked.cells} | {' | '.join(SCENARIOS)} |")
    print("|---" * (len(SCENARIOS) + 1) + "|")
    for key in columns[0]:
        print(f"| {key} | {' | '.join(_printed(column[key]) for column in columns)} |")
    print(f"{asked.campaigns} campaigns each in {time.perf_counter() - started:.0f} s", file=sys.stderr)


if __name__ == "__main__":
    main()
