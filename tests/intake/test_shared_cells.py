"""Notes on cells that have a charge and no curve where others have a curve and no charge."""

from pathlib import Path

import pytest

from cornerwise.intake import read
from intake.writing import LABELS, curve_rows, folder

CELLS = ("c1", "c2", "c3")


def _notes(path: Path, spoilt: dict[str, tuple[str, ...]]) -> tuple[str, ...]:
    rows = [(label, cell) for label in LABELS for cell in spoilt.get(label, CELLS)]
    charges = "construct,cell,charge_e0\n" + "".join(f"{label},{cell},13\n" for label, cell in rows)
    return read(folder(path / "a", curves=curve_rows(cells=CELLS), charges=charges)).notes


@pytest.mark.parametrize(
    "spoilt",
    [
        {},
        {"E181A": ("c1", "c3")},  # a charge less than curves
        {"E181A": ("c1", "c2", "c3", "c4")},  # a charge more
        {"E181A": ("d1", "d2", "d3")},  # other cells altogether
    ],
)
def test_no_note_where_names_hold_nothing_strange(spoilt: dict[str, tuple[str, ...]], tmp_path: Path) -> None:
    assert _notes(tmp_path, spoilt) == ()


@pytest.mark.parametrize(
    ("spoilt", "note"),
    [
        (
            {"E181A": ("c1", "c22", "c3")},
            "E181A: cell c22 has a charge and no curve, cell c2 a curve and no charge; only cells of the "
            "same name are paired",
        ),
        (
            {"E181A": ("c1", "c22", "c32"), "R212Q": ("c11", "c2", "c3"), "WT": ("c1", "C2", "c3")},
            "E181A: cells c22, c32 have a charge and no curve, cells c2, c3 a curve and no charge; only "
            "cells of the same name are paired; likewise in 2 more constructs",
        ),
        (
            {"E181A": ("c1", *(f"d{i}" for i in range(1, 7)))},
            "E181A: cells d1, d2, d3, d4, d5 and 1 more have a charge and no curve, cells c2, c3 a curve "
            "and no charge; only cells of the same name are paired",
        ),
    ],
)
def test_a_misspelt_cell_is_noted(spoilt: dict[str, tuple[str, ...]], note: str, tmp_path: Path) -> None:
    assert _notes(tmp_path, spoilt) == (note,)
