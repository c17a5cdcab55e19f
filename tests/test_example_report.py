"""The report in `examples/orvane` is that of the shipped campaign as it is computed today."""

from pathlib import Path

import pytest

import cornerwise
from cornerwise.render.rounding import span, typeset, with_uncertainty
from cornerwise.result import Result

ROOT = Path(__file__).parents[1]
FOLDER = ROOT / "examples" / "orvane"


@pytest.fixture(scope="module")
def result() -> Result:
    return cornerwise.couple(cornerwise.read(ROOT / "cycles" / "orvane"))


def test_its_numbers_and_inputs_are_todays(result: Result) -> None:
    page = (FOLDER / "report.html").read_text(encoding="utf-8")
    stale = "run python examples/orvane/make.py"
    for row in result.interactions:
        assert typeset(with_uncertainty(row.interaction, row.std_uncertainty)) in page, stale
        assert typeset(span((row.low, row.high), row.std_uncertainty)) in page, stale
    for file in result.inputs:
        assert file.sha256 in page, stale


def test_readme_shows_its_pictures() -> None:
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    for name in ("report.png", "square.png"):
        assert f"](examples/orvane/{name})" in readme
        assert (FOLDER / name).read_bytes().startswith(b"\x89PNG")
