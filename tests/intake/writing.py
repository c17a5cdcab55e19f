"""A small valid campaign as text, to be spoilt in one place at a time; proteins and residues are invented."""

import re
from collections.abc import Iterable, Sequence
from pathlib import Path

import numpy as np
import pytest

from cornerwise.campaign import Campaign
from cornerwise.errors import DataRefused, Problem
from cornerwise.intake import read

LABELS = ("WT", "E181A", "R212Q", "E181A/R212Q")
VOLTAGES = (-120, -100, -80, -60, -40, -20, 0, 20)
CHARGES = (0.0, 0.01, 0.08, 0.31, 0.66, 0.9, 0.98, 1.0)
TOML = 'wild_type = "WT"\ncharge = { value_e0 = 13.0, sem_e0 = 0.5 }\n'

Rows = list[list[str]]

MEDIANS: Rows = [
    ["construct", "median_mV", "sem_mV", "n"],
    *([label, str(-40 - 3 * i), "1.5", "5"] for i, label in enumerate(LABELS)),
]


def curve_rows(labels: Iterable[str] = LABELS, cells: Sequence[str] = ("c1",)) -> Rows:
    """Header and points of one curve per cell; the first point of the first cell stands in row 2."""
    rows = [["construct", "cell", "voltage_mV", "charge"]]
    for label in labels:
        for cell in cells:
            rows += [[label, cell, str(v), str(q)] for v, q in zip(VOLTAGES, CHARGES, strict=True)]
    return rows


def changed(rows: Rows, row: int, column: str, value: str) -> Rows:
    """A copy with one field changed, by its row in the file."""
    copy = [list(fields) for fields in rows]
    copy[row - 1][rows[0].index(column)] = value
    return copy


def wide_rows(names: Iterable[str] = tuple(f"{label}/c1" for label in LABELS)) -> Rows:
    """The same curves, one column per cell."""
    columns = list(names)
    body = [[str(v), *([str(q)] * len(columns))] for v, q in zip(VOLTAGES, CHARGES, strict=True)]
    return [["voltage_mV", *columns], *body]


def mingled(body: Sequence[list[str]], order: Sequence[list[str]]) -> Rows:
    """Rows in another order that keeps those of each cell in theirs, as a voltage out of order is refused."""
    own = {tuple(row[:2]): iter([one for one in body if one[:2] == row[:2]]) for row in body}
    return [next(own[tuple(row[:2])]) for row in order]


def text_of(rows: Rows, delimiter: str = ",") -> str:
    """Rows as a text file."""
    return "".join(delimiter.join(row) + "\n" for row in rows)


def folder(path: Path, toml: str | bytes = TOML, **tables: Rows | str | bytes) -> Path:
    """Write a campaign folder; tables by name, `curves` unless given; None as toml writes none."""
    path.mkdir(exist_ok=True)
    files = {"campaign.toml": toml}
    if not {"curves", "medians"} & {name.partition("_")[0] for name in tables}:
        tables["curves"] = curve_rows()
    for name, content in tables.items():
        stem, _, suffix = name.partition("_")
        files[f"{stem}.{suffix or 'csv'}"] = text_of(content) if isinstance(content, list) else content
    for name, content in files.items():
        (path / name).write_bytes(content if isinstance(content, bytes) else content.encode())
    return path


def problems(path: Path) -> tuple[Problem, ...]:
    """What a refused campaign is refused for."""
    with pytest.raises(DataRefused, match="the data were refused: ") as caught:
        read(path)
    return caught.value.problems


def assert_refused(
    path: Path,
    *,
    match: str,
    file: str | None = None,
    row: int | None = None,
    column: str | None = None,
) -> None:
    """The campaign is refused for one thing alone: at this place, with this text.

    The row of a fault in ``campaign.toml`` is looked up there when it is not given.
    """
    found = problems(path)
    assert len(found) == 1, "\n".join(map(str, found))
    (problem,) = found
    if file == "campaign.toml" and row is None and column is not None:
        row = toml_row((path / file).read_text(encoding="utf-8").split("\n"), column)
    assert (problem.origin.file, problem.origin.row, problem.origin.column) == (file, row, column), problem
    assert re.search(match, str(problem)), problem
    assert problem.remedy
    assert problem.expected


def toml_row(lines: Sequence[str], column: str) -> int | None:
    """Where a plain ``campaign.toml`` has a key, a key of a table, or an entry; None where it has neither."""
    table, _, key = column.partition(" ")
    if key.startswith("entry "):
        number, _, key = key.removeprefix("entry ").partition(" ")
        heads = [row for row, line in enumerate(lines) if line.startswith(f"[[{table}]]")]
        first = heads[int(number) - 1]
        last = next((row for row in heads if row > first), len(lines))
    else:
        head = re.compile(rf"\[?{re.escape(table)}\b")
        first = next((row for row, line in enumerate(lines) if head.match(line)), len(lines))
        last = len(lines)
    own = (row for row in range(first, last) if key and lines[row].startswith((f"{key} =", f'"{key}" =')))
    row = next(own, first)
    return row + 1 if row < len(lines) else None


def content(campaign: Campaign) -> object:
    """Everything a campaign says, without the places it was read at and the files' checksums."""
    constructs = [
        (
            construct.label,
            construct.mutations,
            [
                (c.cell, c.batch, tuple(c.voltage_mv), tuple(c.charge), c.charge_unit, c.holding_mv, c.phase)
                for c in construct.curves
            ],
            construct.median and (construct.median.median_mv, construct.median.sem_mv, construct.median.n),
            [
                (r.cell, r.batch, r.charge_e0, r.own_uncertainty_e0, r.method)
                for r in construct.charge_replicates
            ],
            [(s.charge_e0, s.sem_e0, s.n, s.method, s.citation) for s in construct.charge_summaries],
            [(o.cell, o.batch, tuple(o.voltage_mv), tuple(o.open_probability)) for o in construct.openings],
        )
        for construct in campaign.constructs
    ]
    distances = [(d.residues, d.angstrom, d.atoms, d.source, d.definition) for d in campaign.distances]
    requests = [(request.name, request.mutations) for request in campaign.requests]
    return (
        campaign.settings, constructs, campaign.cycles, requests, campaign.background, campaign.exclusions,
        distances,
    )  # fmt: skip


def sigmoid(voltage_mv: np.ndarray, midpoint_mv: float) -> np.ndarray:
    """A charge-voltage curve from 0 to 1."""
    return np.asarray(1 / (1 + np.exp(-(voltage_mv - midpoint_mv) / 9.0)))
