"""Time and size of report, tables and figures for many cycles, in units of importing numpy and pandas.

Run from the project's root: ``python tests/bench/report_speed.py [CYCLES] [--figures]``. The
campaign is invented: one wild type, every pair of a set of residues, eight cells a construct.
"""

import itertools
import os
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

import numpy as np
from builders import campaign, construct

from cornerwise.coupling import couple
from cornerwise.render.figures.files import figure_files
from cornerwise.render.files import output_files, result_files
from cornerwise.render.manuscript.files import table_files
from cornerwise.render.report.page import report_html
from cornerwise.result import Result

CELLS = 8


def invented(cycles: int) -> Result:
    """Result of so many pairs that share one wild type and their singles."""
    rng = np.random.default_rng(1)
    residues = 2
    while residues * (residues - 1) // 2 < cycles:
        residues += 1
    singles = [f"A{10 + 3 * place}Q" for place in range(residues)]
    shifts = dict(zip(singles, rng.normal(0.0, 8.0, residues), strict=True))
    pairs = list(itertools.combinations(singles, 2))[:cycles]
    labels: list[tuple[str, ...]] = [(), *((one,) for one in singles), *pairs]
    constructs = []
    for carried in labels:
        median = -40.0 + sum(shifts[one] for one in carried) + rng.normal(0.0, 4.0 * (len(carried) == 2))
        medians = median + rng.normal(0.0, 1.5, CELLS)
        charges = 13.0 + rng.normal(0.0, 0.4, CELLS)
        constructs.append(construct("/".join(carried) or "WT", list(medians), list(charges)))
    return couple(campaign(constructs))


def timed(work: Callable[[], object]) -> tuple[float, object]:
    """Seconds a piece of work took, and what it gave."""
    start = time.perf_counter()
    given = work()
    return time.perf_counter() - start, given


def _together(files: Mapping[str, str | bytes]) -> bytes:
    return b"".join(one if isinstance(one, bytes) else one.encode() for one in files.values())


def main(cycles: int, *, figures: bool) -> None:
    """Print one line a step."""
    yardstick = min(
        timed(lambda: subprocess.run([sys.executable, "-c", "import numpy, pandas"], check=True))[0]
        for _ in range(3)
    )
    result = invented(cycles)
    steps: dict[str, Callable[[], object]] = {
        "report": lambda: report_html(result),
        "report without cycle figures": lambda: report_html(result, cycle_figures=False),
        "report with cycle figures": lambda: report_html(result, cycle_figures=True),
        "report, result.json and CSV": lambda: "".join(result_files(result).values()),
        "tables of a manuscript": lambda: _together(table_files(result)),
        "all of --out": lambda: _together(output_files(result)),
    }
    if figures:
        steps["all figures, one process"] = lambda: b"".join(figure_files(result, workers=1).values())
        name = f"all figures, {os.cpu_count()} processes"
        steps[name] = lambda: b"".join(figure_files(result).values())
    print(
        f"{len(result.interactions)} cycles, {len(result.constructs)} constructs, {len(result.cells)} cells"
    )
    print("| step | times an import of numpy and pandas | seconds | MB |\n|---|---:|---:|---:|")
    for name, work in steps.items():
        seconds, given = timed(work)
        assert isinstance(given, str | bytes)
        size = len(given.encode() if isinstance(given, str) else given) / 1e6
        print(f"| {name} | {seconds / yardstick:.1f} | {seconds:.2f} | {size:.1f} |", flush=True)


if __name__ == "__main__":
    numbers = [int(argument) for argument in sys.argv[1:] if argument.isdigit()]
    main(*(numbers or [200]), figures="--figures" in sys.argv)
