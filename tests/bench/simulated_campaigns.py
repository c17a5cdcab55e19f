"""How often `couple` holds the true interaction of simulated campaigns, for every gating model that ships.

    python tests/bench/simulated_campaigns.py [--campaigns 80] [--workers 2] [--out FILE]

Each campaign goes the whole way: curves and charges are drawn from the model by `simulate`, medians are read
from the curves, and `couple` forms the interval. The truth is that of the partition function. Beside each
share stands its binomial standard error. With the default number it takes under ten minutes of one core.
"""

from __future__ import annotations

import argparse
import math
import multiprocessing
import sys
import time
import zlib
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from cornerwise import couple, read_model, simulate, truth_of
from cornerwise.errors import DataRefused
from cornerwise.simulation import Model, Recording

MODELS = sorted((Path(__file__).parents[2] / "examples" / "models").glob("*.toml"))
DAYS = ("day 1", "day 2")


@dataclass(frozen=True, kw_only=True, slots=True)
class Case:
    """One row of the table."""

    path: Path
    recording: str
    campaigns: int

    def model(self, seed: int) -> Model:
        """The model with another seed and this way of recording."""
        model = read_model(self.path)
        how, common = model.recording, model.common
        changed: dict[str, Recording] = {
            "4 cells": replace(how, cells=4, charge_cells=4),
            "8 cells, skewed": replace(how, scatter="skewed", cell_sd_mv=3.0, charge_sd=0.05),
            "8 cells, two days": replace(how, batches=DAYS),
        }
        if self.recording == "8 cells, two days":
            common = replace(common, batch_sd_mv=3.0, batch_charge_sd=0.02)
        settings = replace(model.settings, replicates=1000)
        return replace(model, seed=seed, settings=settings, common=common, recording=changed[self.recording])


RECORDINGS = ("4 cells", "8 cells, skewed", "8 cells, two days")


def intervals(case: Case) -> tuple[Case, np.ndarray, float]:
    """Estimate, both intervals' limits of each campaign, shape (campaigns, 5), and the truth."""
    found = np.full((case.campaigns, 5), np.nan)
    first = zlib.crc32(f"{case.path.stem} {case.recording}".encode())  # no two cases share random numbers
    for i in range(case.campaigns):
        try:
            (row,) = couple(simulate(case.model(first + i))).interactions
        except DataRefused:
            continue
        found[i] = [
            math.nan if value is None else value
            for value in (row.interaction, row.low, row.high, row.boot_low, row.boot_high)
        ]
    return case, found, truth_of(case.model(0)).cycles[0].interaction


HEADER = (
    "| gating model | recording | true I | mean error | half-width | propagated | bootstrap |\n"
    "|---|---|---:|---:|---:|---:|---:|"
)


def share(held: np.ndarray) -> str:
    """Percentage with its binomial standard error."""
    p, n = float(held.mean()), len(held)
    return f"{100 * p:.1f} ± {100 * math.sqrt(max(p * (1 - p), 1 / n**2) / n):.1f}"


def row(case: Case, found: np.ndarray, truth: float) -> str:
    """One line of the table."""
    found = found[np.isfinite(found).all(axis=1)]
    errors = found[:, 0] - truth
    sem = errors.std(ddof=1) / math.sqrt(len(errors))
    cells = [
        case.path.stem.replace("_", " "),
        case.recording + ("" if len(found) == case.campaigns else f" ({case.campaigns - len(found)} lost)"),
        f"{truth:.2f}",
        f"{errors.mean():+.3f} ± {sem:.3f}",
        f"{np.median(found[:, 2] - found[:, 1]) / 2:.2f}",
        share((found[:, 1] <= truth) & (truth <= found[:, 2])),
        share((found[:, 3] <= truth) & (truth <= found[:, 4])),
    ]
    return f"| {' | '.join(cells)} |"


def pooled(results: list[tuple[Case, np.ndarray, float]], recording: str) -> str:
    """All models of one way of recording together."""
    parts = [(found, truth) for case, found, truth in results if case.recording == recording]
    propagated = np.concatenate([(f[:, 1] <= t) & (t <= f[:, 2]) for f, t in parts])
    bootstrap = np.concatenate([(f[:, 3] <= t) & (t <= f[:, 4]) for f, t in parts])
    return f"| all | {recording} | | | | {share(propagated)} | {share(bootstrap)} |"


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--campaigns", type=int, default=80)
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--out", type=Path, help="write the table here too")
    asked = parser.parse_args()
    started = time.perf_counter()
    cases = [
        Case(path=path, recording=recording, campaigns=asked.campaigns)
        for path in MODELS
        for recording in RECORDINGS
    ]
    with multiprocessing.Pool(asked.workers) as pool:
        results = list(pool.imap(intervals, cases, chunksize=1))
    lines = [
        "# Coverage of simulated campaigns\n",
        f"Printed by `tests/bench/simulated_campaigns.py`: {asked.campaigns} campaigns a row, energies in "
        "kcal/mol, 95 %\nintervals, shares in % with their binomial standard errors.\n",
        HEADER,
        *(row(*result) for result in results),
        *(pooled(results, recording) for recording in RECORDINGS),
    ]
    print("\n".join(lines))
    print(f"{len(cases)} cases in {time.perf_counter() - started:.0f} s", file=sys.stderr)
    if asked.out is not None:
        asked.out.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
