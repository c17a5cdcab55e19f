"""Damaged files, each refused at the place and for the reason that `damaged/expected.toml` has for it."""

import tomllib
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


def test_every_file_has_its_expectation() -> None:
    files = {path.relative_to(DAMAGED).as_posix() for path in DAMAGED.glob("*/*")}
    assert files == EXPECTED.keys()
