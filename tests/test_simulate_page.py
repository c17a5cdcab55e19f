"""docs/simulate.md names every key of a model file with its default, and no other."""

import re
from dataclasses import fields
from pathlib import Path

import pytest

from cornerwise import read_model
from cornerwise.intake.model.keys import COMMON_RULES, KEYS, RECORDING_RULES
from cornerwise.simulation import Recording
from cornerwise.simulation.model import Common

TOP = Path(__file__).parents[1]
PAGE = (TOP / "docs" / "simulate.md").read_text(encoding="utf-8")
HEAD = r"^\| key(?: of `\[+(\w+)\]+`)? \| default \| meaning \|\n\|[-|]+\n((?:\|.*\n)+)"


def rows_of(table: str) -> dict[str, str]:
    """Keys of a table of the model file as the page has them, and what it says of the default."""
    tables = re.findall(HEAD, PAGE, re.MULTILINE)
    rows = [row for name, rows in tables if name == table for row in rows.splitlines()]
    cells = [[cell.strip().strip("`") for cell in row.split("|")] for row in rows]
    assert len({cell[1] for cell in cells}) == len(cells)
    return {cell[1]: cell[2] for cell in cells}


@pytest.mark.parametrize("table", [name for name in KEYS if name != "construct"])
def test_every_key_has_its_row(table: str) -> None:
    assert sorted(rows_of(table)) == sorted(KEYS[table])


def test_defaults_are_todays() -> None:
    documented = rows_of("recording")
    known = {field.name: field.default for kind in (Recording, Common) for field in fields(kind)}
    for rule in (*RECORDING_RULES, *COMMON_RULES):
        default, told = known[rule.attribute], documented[rule.key]
        match default:
            case None:
                assert told == "not stated"
            case ():
                assert told == "none"
            case tuple():
                assert told == str(list(default))
            case bool():
                assert told == str(default).lower()
            case str():
                assert told.strip('"') == default
            case _:
                assert float(told) == default


def test_models_that_are_named_exist_and_are_read() -> None:
    named = set(re.findall(r"`?(examples/models/\w+\.toml)", PAGE))
    assert named
    for name in named:
        assert read_model(TOP / name).cycles


def test_the_summary_is_that_of_the_bench() -> None:
    bench = (TOP / "docs" / "simulated_campaigns.md").read_text(encoding="utf-8")
    pooled = re.findall(r"^\| all \| (.+?) \|.*\| (\S+ ± \S+) \| (\S+ ± \S+) \|$", bench, flags=re.MULTILINE)
    told = re.findall(r"^\| .* \| (\S+ ± \S+) % \| (\S+ ± \S+) % \|$", PAGE, flags=re.MULTILINE)
    assert len(pooled) == 3
    assert told == [(propagated, bootstrap) for _, propagated, bootstrap in pooled]
