"""What a column means is said once: the workbook for a manuscript tells the same as the CSV files."""

import pytest

from cornerwise.columns import OUTPUT_TABLES, Column
from cornerwise.render.manuscript import constructs, couplings

IN_WORDS = {"flags"}  # codes in a CSV file, letters with footnotes in a manuscript


def _columns(table: str) -> dict[str, Column]:
    return {column.name: column for column in OUTPUT_TABLES[table].columns}


@pytest.mark.parametrize(
    ("recipes", "table"), [(constructs.RECIPES, "constructs"), (couplings.RECIPES, "interactions")]
)
def test_the_workbook_says_what_the_files_say(recipes: tuple, table: str) -> None:
    known = _columns(table)
    told = {name: meaning for recipe in recipes for name, _, meaning in recipe.parts if name in known}
    assert len(told) > len(known) / 2
    for name in told.keys() - IN_WORDS:
        assert told[name] == known[name].explained


def test_types_are_those_of_the_rows() -> None:
    columns = _columns("interactions")
    some = ("order", "interaction", "flags", "rank")
    kinds = {name: (columns[name].type, columns[name].needed) for name in some}
    assert kinds == {
        "order": ("integer", True), "interaction": ("number", False), "flags": ("string", False),
        "rank": ("integer", False),
    }  # fmt: skip
    assert columns["favours"].words == ("resting", "activated")
    assert columns["favours"].explained.endswith("established: resting, activated")
    assert _columns("cells")["used"].type == "boolean"
