"""The pages under docs say what the program does: examples run, every flag and verdict has its paragraph."""

import doctest
import os
import re
import shutil
import subprocess
import sys
from pathlib import Path
from typing import get_args

import pytest

from cornerwise import charges
from cornerwise.flags import FLAG_CODES
from cornerwise.measurements import FEWEST_CELLS, RANGE_DIFFERENCE_MV
from cornerwise.median import curve_quality
from cornerwise.median.extrapolation import REFUSED_MISSING, REFUSED_OWN_MISSING
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
        ("unsaturated-low", f"more than {in_percent(REFUSED_MISSING)} of the charge of the construct's mean"),
        ("unsaturated-low", f"more than {in_percent(REFUSED_OWN_MISSING)} of one cell's"),
        ("not-monotonic", f"more than {in_percent(curve_quality.REVERSAL_LIMIT)} of"),
        ("not-monotonic", f"more than {curve_quality.REVERSAL_IN_NOISE:g} times the noise"),
        ("coarse-steps", f"Fewer than {curve_quality.POINTS_LIMIT} points, or fewer than "
         f"{curve_quality.STEPS_LIMIT:g} steps"),
        ("noisy", f"more than {in_percent(curve_quality.NOISE_LIMIT)} of"),
        ("area-disagrees", f"more than {curve_quality.DISAGREEMENT_LIMIT_MV:g} mV"),
        ("area-disagrees", f"more than {curve_quality.DISAGREEMENT_IN_NOISE:g} times what noise"),
        ("outlying-cell", f"{in_percent(curve_quality.OUTLIER_P)} over all"),
        ("outlying-cell", f"at least {curve_quality.OUTLIER_LIMIT_MV:g} mV"),
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


WITH_COMMANDS = sorted(
    page for page in DOCS.glob("*.md") if "```console\n" in page.read_text(encoding="utf-8")
)


def _dialogue(page: Path) -> list[tuple[str, str]]:
    """Commands of a page in their order, each with the output that is shown below it."""
    blocks = re.findall(r"```console\n(.*?)```", page.read_text(encoding="utf-8"), flags=re.DOTALL)
    steps = [step for block in blocks for step in re.split(r"^\$ ", block, flags=re.MULTILINE)[1:]]
    return [(step.partition("\n")[0], step.partition("\n")[2]) for step in steps]


@pytest.mark.skipif(shutil.which("sh") is None, reason="no POSIX shell to run the page's commands")
@pytest.mark.parametrize("page", WITH_COMMANDS, ids=lambda page: page.name)
def test_commands_on_the_page_print_what_it_shows(page: Path, tmp_path: Path) -> None:
    shutil.copytree(DOCS.parent / "cycles", tmp_path / "cycles")
    (tmp_path / "bin").mkdir()
    command = tmp_path / "bin" / "cornerwise"
    command.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m cornerwise "$@"\n', encoding="utf-8")
    command.chmod(0o755)
    environment = {
        **os.environ,
        "PATH": f"{command.parent}{os.pathsep}{os.environ['PATH']}",
        "PYTHONIOENCODING": "utf-8",
    }
    checker = doctest.OutputChecker()
    for line, shown in _dialogue(page):
        done = subprocess.run(
            ["sh", "-c", line], cwd=tmp_path, env=environment, encoding="utf-8", check=False,
            stdout=subprocess.PIPE, stderr=subprocess.STDOUT,
        )  # fmt: skip
        printed = "".join(
            f"{text}\n"
            for text in done.stdout.splitlines()
            if not re.match("cornerwise: .*, [0-9]+ of", text)
        )
        assert checker.check_output(shown, printed, doctest.ELLIPSIS), f"$ {line}\n{printed}"


def test_there_are_pages_with_commands() -> None:
    assert [page.name for page in WITH_COMMANDS] == ["tutorial.md"]
