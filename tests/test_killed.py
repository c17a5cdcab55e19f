"""``couple --out`` killed at any moment: the earlier result untouched or the new one complete; `killing`."""

import json
import os
import subprocess
import sys
from collections import Counter
from pathlib import Path

import pytest

KILLING = Path(__file__).parent / "killing.py"
CYCLE = Path(__file__).parents[1] / "cycles" / "published-medians"
MOMENTS = 24


@pytest.mark.skipif(not hasattr(os, "fork"), reason="runs are forked from one loaded interpreter")
@pytest.mark.parametrize(
    ("before", "options"),
    [("earlier", ()), ("nothing", ()), ("earlier", ("no-exchange",))],
    ids=["earlier", "nothing", "earlier, two steps"],
)
def test_killed_at_many_moments(before: str, options: tuple[str, ...], tmp_path: Path) -> None:
    campaign = tmp_path / "campaign"
    campaign.mkdir()
    for path in CYCLE.iterdir():
        (campaign / path.name).write_bytes(path.read_bytes())
    with (campaign / "campaign.toml").open("a") as file:
        file.write("replicates = 1000\n")
    (tmp_path / "place").mkdir()
    out = tmp_path / "place" / "results"
    words = [sys.executable, str(KILLING), campaign, out, before, str(MOMENTS), *options]
    done = subprocess.run(words, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    states = Counter(json.loads(done.stdout))
    assert states["killed"] >= MOMENTS
    assert states[before] > 0
    assert states["new"] > 0
    assert (states["aside"] > 0) == (bool(options) and before == "earlier")
