"""The examples run and give the output that stands beside them."""

import subprocess
import sys
from pathlib import Path

import pytest

EXAMPLES = Path(__file__).parents[1] / "examples"


@pytest.mark.parametrize("script", sorted(EXAMPLES.glob("*.py")), ids=lambda path: path.stem)
def test_example(script: Path) -> None:
    done = subprocess.run([sys.executable, str(script)], capture_output=True, text=True, check=True)
    assert done.stdout == script.with_suffix(".txt").read_text(encoding="utf-8")


def test_there_are_examples() -> None:
    assert len(list(EXAMPLES.glob("*.py"))) >= 3
