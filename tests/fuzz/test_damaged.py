"""Damaged files, each refused at the place and for the reason that `damaged/expected.toml` has for it."""

import json
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from cornerwise.errors import DataRefused
from fuzz import readers

DAMAGED = Path(__file__).parents[1] / "damaged"
EXPECTED: dict[str, dict[str, Any]] = tomllib.loads((DAMAGED / "expected.toml").read_text(encoding="utf-8"))


def _refusal(name: str, folder: Path) -> DataRefused:
    with pytest.raises(DataRefused, match="the data were refused: ") as caught:
        readers.opened(Path(name).parent.name, (DAMAGED / name).read_bytes(), folder)
    return caught.value


@pytest.mark.parametrize("name", EXPECTED)
def test_refused_at_its_place_and_for_its_reason(name: str, tmp_path: Path) -> None:
    expected = EXPECTED[name]
    problems = _refusal(name, tmp_path).problems
    first = problems[0]
    assert first.origin.file.removeprefix(f"{tmp_path}/") == expected["file"]
    assert (first.origin.row, first.origin.column) == (expected.get("row"), expected.get("column"))
    assert first.found.startswith(expected["found"])
    assert len(problems) == expected["problems"]


@pytest.mark.parametrize(
    ("change", "column", "found"),
    [
        (lambda d: d["interactions"][0].pop("cycle"), "interactions 1 cycle", "'nothing'"),
        (lambda d: d["interactions"][0].update(interaction="3.1"), "interactions 1 interaction", "'3.1'"),
        (lambda d: d["interactions"][0].update(more=1), "interactions 1 more", "1"),
        (lambda d: d["constructs"][0].update(cells_used=True), "constructs 1 cells_used", "True"),
        (lambda d: d["constructs"][0].update(energy=10**400), "constructs 1 energy", "1000"),
        (lambda d: d["settings"].update(title="\ud83d"), "settings title", "'\\ud83d'"),
        (lambda d: d["settings"].update(title="\x1b[2J"), "settings title", "'\\x1b[2J'"),
        (lambda d: d.pop("settings"), "settings", "'nothing'"),
        (lambda d: d.update(more=1), "more", "1"),
        (lambda d: d.update(energy_threshold=0.5), "energy_threshold", "0.5"),
        (lambda d: d.update(versions={"python": 3}), "versions", "{'python': 3}"),
        (lambda d: d.update(notes="none"), "notes", "'none'"),
    ],
)
def test_results_that_were_edited_and_sealed_again(
    change: Callable[[dict[str, Any]], object], column: str, found: str, tmp_path: Path
) -> None:
    document = json.loads(readers.small_result())
    change(document)
    with pytest.raises(DataRefused, match="the data were refused: 1 problem") as caught:
        readers.opened("result", readers.sealed(json.dumps(document).encode()), tmp_path)
    (problem,) = caught.value.problems
    assert problem.origin.column == column
    assert problem.found.startswith(found)


def test_every_file_has_its_expectation() -> None:
    files = {path.relative_to(DAMAGED).as_posix() for path in DAMAGED.glob("*/*")}
    assert files == EXPECTED.keys()
