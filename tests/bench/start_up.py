"""How long a command takes to begin, against interpreters that only import what it needs.

    python tests/bench/start_up.py [REPEATS]

Every process is run in turn, `REPEATS` times over, so that a machine that is busy for a while slows all of
them. Prints the medians of each, time on the clock and of the processor, and the ratios that
``DEVELOPERS.md`` states; on a busy machine those of the processor tell more.
"""

from __future__ import annotations

import os
import resource
import statistics
import subprocess
import sys
import time
from pathlib import Path

ROOT = Path(__file__).parents[2]
CAMPAIGN = ROOT / "cycles" / "orvane"
PROCESSES = {
    "import typer, rich": ["-c", "import typer, rich"],
    "cornerwise --help": ["-m", "cornerwise", "--help"],
    "cornerwise --version": ["-m", "cornerwise", "--version"],
    "import numpy, pandas": ["-c", "import numpy, pandas"],
    "cornerwise couple cycles/orvane": ["-m", "cornerwise", "couple", str(CAMPAIGN)],
}


def seconds(words: list[str]) -> tuple[float, float]:
    """Time of one run, on the clock and of the processor."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    began = time.perf_counter()
    subprocess.run([sys.executable, *words], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, check=True)
    took = time.perf_counter() - began
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return took, after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


def main() -> None:
    repeats = int(sys.argv[1]) if len(sys.argv) > 1 else 11
    os.environ.setdefault("OMP_NUM_THREADS", "1")
    times: dict[str, list[tuple[float, float]]] = {name: [] for name in PROCESSES}
    for _ in range(repeats):
        for name, words in PROCESSES.items():
            times[name].append(seconds(words))
    for place, what in enumerate(("on the clock", "of the processor")):
        median = {name: statistics.median(one[place] for one in taken) for name, taken in times.items()}
        print(f"seconds {what}")
        for name, taken in times.items():
            least, most = (chosen(one[place] for one in taken) for chosen in (min, max))
            print(f"  {name:34} {median[name]:6.3f}  (from {least:.3f} to {most:.3f})")
        start = median["cornerwise --help"] / median["import typer, rich"]
        couple = (median["cornerwise couple cycles/orvane"] - 1.0) / median["import numpy, pandas"]
        print(f"  --help is {start:.2f} times the import of typer and rich (at most 1.5)")
        print(f"  couple is {couple:.2f} times the import of numpy and pandas, and 1 s (at most 1.6)")


if __name__ == "__main__":
    main()
