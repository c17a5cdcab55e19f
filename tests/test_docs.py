"""The pages under docs say what the program does: examples run, every flag and verdict has its paragraph."""

import doctest
import re
from pathlib import Path
from typing import get_args

import pytest

from cornerwise import charges
from cornerwise.flags import FLAG_CODES
from cornerwise.measurements import FEWEST_CELLS, RANGE_DIFFERENCE_MV
from cornerwise.median import curve_quality
from cornerwise.units import in_percent
from cornerwise.verdicts import ChargeVerdict, InteractionVerdict, ShortcutVerdict

DOCS = Path(__file__).parents[1] / "docs"
WITH_PYTHON = sorted(page for page in DOCS.glob("*.md") if ">>> " in page.read_text(encoding="utf-8"))


@pytest.mark.parametrize("page", WITH_PYTHON, ids=lambda page: page.name)
def test_python_on_the_page_gives_what_it_shows(page: Path) -> None:
    failed, tried = doctest.testfile(str(page), module_relative=False, encoding="utf-8")
    assert tried > 0
    assert failed == 0


def test_there_are_pages_with_python() -> None:
    assert WITH_PYTHON


def test_every_flag_and_verdict_has_its_paragraph() -> None:
    page = (DOCS / "flags_and_verdicts.md").read_text(encoding="utf-8")
    headings = " ".join(line for line in page.splitlines() if line.startswith("### "))
    assert set(re.findall(r"`([a-z-]+)`", headings)) == set(FLAG_CODES)
    _, interaction, charge, shortcut, *_ = page.split("\n## ")
    for words, part in (
        (InteractionVerdict, interaction),
        (ChargeVerdict, charge),
        (ShortcutVerdict, shortcut),
    ):
        assert tuple(re.findall(r"^\| `([a-z]+)` \|", part, flags=re.MULTILINE)) != ()
        assert set(re.findall(r"^\| `([a-z]+)` \|", part, flags=re.MULTILINE)) == set(get_args(words))


@pytest.mark.parametrize(
    ("heading", "words"),
    [
        ("unsaturated-low", f"More than {in_percent(curve_quality.MISSING_LIMIT)} of"),
        ("unsaturated-low", f"more than {curve_quality.DOUBT_LIMIT_MV:g} mV"),
        ("sloping-plateau", f"more than {in_percent(curve_quality.SLOPE_LIMIT)} of"),
        ("not-monotonic", f"more than {in_percent(curve_quality.REVERSAL_LIMIT)} of"),
        ("coarse-steps", f"Fewer than {curve_quality.POINTS_LIMIT} points, or fewer than "
         f"{curve_quality.STEPS_LIMIT:g} steps"),
        ("noisy", f"more than {in_percent(curve_quality.NOISE_LIMIT)} of"),
        ("area-disagrees", f"more than {curve_quality.DISAGREEMENT_LIMIT_MV:g} mV"),
        ("outlying-cell", f"{in_percent(curve_quality.OUTLIER_P)} over all"),
        ("few-cells", f"Fewer than {FEWEST_CELLS} cells"),
        ("charge-implausible", "outside {:g} to {:g} e0".format(*charges.PLAUSIBLE_CHARGE_E0)),
        ("charge-implausible", f"more than {charges.PLAUSIBLE_LOSS_PER_MUTATION_E0:g} e0"),
        ("mixed-ranges", f"more than {RANGE_DIFFERENCE_MV:g} mV"),
    ],
)  # fmt: skip
def test_the_page_of_flags_states_the_limits_in_force(heading: str, words: str) -> None:
    page = (DOCS / "flags_and_verdicts.md").read_text(encoding="utf-8")
    (paragraph,) = [part for part in page.split("\n### ") if part.startswith(f"`{heading}`")]
    assert words in " ".join(paragraph.split())
