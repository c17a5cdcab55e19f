"""docs/formats.md and the starter name every key and column that is read, and no other."""

import re
import shutil
from importlib import resources
from pathlib import Path
from types import ModuleType

import pytest

from cornerwise.campaign import Settings, distance_between
from cornerwise.intake import charges, curves, distances, medians, openings, read
from cornerwise.intake.settings import KEYS, SECTIONS
from cornerwise.intake.structure import STRUCTURE_KEYS
from cornerwise.render.legend import setting_values
from cornerwise.render.manuscript import constructs, couplings
from cornerwise.render.manuscript.options import GROUPINGS
from cornerwise.render.rounding import DIGIT_RULES
from cornerwise.units import ENERGY_UNITS

PAGE = (Path(__file__).parents[1] / "docs" / "formats.md").read_text(encoding="utf-8")


def test_every_key_has_its_row() -> None:
    documented = re.findall(r"^\| `(\w+)` \|", PAGE.split("tables may follow")[0], flags=re.MULTILINE)
    assert sorted(documented) == sorted(KEYS)


def test_every_key_is_in_the_starter() -> None:
    text = resources.files("cornerwise").joinpath("starter_campaign", "campaign.toml").read_text("utf-8")
    assert [key for key in KEYS if not re.search(rf"^(# )?{key} = ", text, flags=re.MULTILINE)] == []
    assert [table for table in SECTIONS if f"[{table}]" not in text] == []


def test_every_key_of_a_structure_is_named() -> None:
    (example,) = re.findall(r"^\[structure\].*?```", PAGE, flags=re.MULTILINE | re.DOTALL)
    assert re.findall(r"^(\w+) = ", example, flags=re.MULTILINE) == list(STRUCTURE_KEYS)


def test_every_key_is_printed_with_the_result() -> None:
    printed = setting_values(Settings(wild_type="WT", charge_method="noise"))
    assert sorted(printed) == sorted(KEYS)


@pytest.mark.parametrize(
    ("table", "fields"),
    [
        ("curves", curves.FIELDS),
        ("medians", medians.FIELDS),
        ("charges, a row a cell", charges.REPLICATE_FIELDS),
        ("charges, a row a construct", charges.SUMMARY_FIELDS),
        ("openings", openings.FIELDS),
        ("distances", distances.FIELDS),
    ],
)
def test_every_column_is_named(table: str, fields: tuple) -> None:
    name, *rest = table.split(",")
    start = f"| `{name}`" + (f",{rest[0]} |" if rest else " |")
    (row,) = [line for line in PAGE.splitlines() if line.startswith(start)]
    documented = set(re.findall(r"`(\w+)`", row.split("|")[2]))
    known = {header for field in fields for header in field.headers}
    assert documented == known | (documented & {"n", "citation"})


@pytest.mark.parametrize(
    ("start", "module"),
    [("Columns of the coupling table", couplings), ("Columns of the construct table", constructs)],
)
def test_every_column_of_a_manuscript_table_is_named(start: str, module: ModuleType) -> None:
    part = PAGE.partition(start)[2].partition("\n\nColumns")[0]
    documented = re.findall(r"^\| `(\w+)`( \*)? \|", part, flags=re.MULTILINE)
    assert [key for key, _ in documented] == [recipe.key for recipe in module.RECIPES]
    assert {key for key, usual in documented if usual} == set(module.USUAL)


def test_every_choice_of_a_manuscript_table_is_named() -> None:
    (group,) = [line for line in PAGE.splitlines() if line.startswith("| `--group`")]
    assert re.findall(r"`(\w+)`", group.split("|")[2]) == list(GROUPINGS)
    (digits,) = [line for line in PAGE.splitlines() if line.startswith("| `--digits`")]
    assert re.findall(r"`([\w-]+)`", digits.split("|")[2]) == list(DIGIT_RULES)
    (unit,) = [line for line in PAGE.splitlines() if line.startswith("| `--unit`")]
    assert re.findall(r"`([\w/]+)`", unit.split("|")[2]) == list(ENERGY_UNITS)


def test_the_distances_shown_are_read_with_the_shipped_campaign(tmp_path: Path) -> None:
    folder = tmp_path / "campaign"
    shutil.copytree(Path(__file__).parents[1] / "cycles" / "orvane", folder)
    (shown,) = re.findall(r"^```csv\n(residue_a.*?)```", PAGE, flags=re.MULTILINE | re.DOTALL)
    (folder / "distances.csv").write_text(shown, encoding="utf-8")
    campaign = read(folder)
    known = {
        cycle.name: distance.angstrom
        for cycle in campaign.cycles
        if (distance := distance_between(cycle.mutations, campaign.distances)) is not None
    }
    assert known == {"D171N/K232Q": 3.1, "E154Q/R226Q": 7.4}
    assert campaign.notes == ()
