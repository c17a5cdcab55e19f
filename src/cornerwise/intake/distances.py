"""The table of distances between side chains: ``residue_a``, ``residue_b``, ``distance_A``, a row a pair.

The distance may be in nanometres, ``distance_nm``. ``citation`` and ``definition`` (what was measured, and
how) may be added; they go with the distance into every output. Residues are the native ones, ``D171`` or
``Asp171``, numbered as in the labels of the constructs.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .. import plausible
from ..campaign import FloatArray
from ..errors import Origin
from ..mutations import Residue, parse_mutation, parse_residue
from . import allowed
from .findings import Findings, shown
from .header import Field, RawTable
from .rows import refuse_repeated
from .table import Table

ENDS = ("residue_a", "residue_b")
ANGSTROM_PER_NM = 10.0

_LOW_A, _HIGH_A = plausible.DISTANCE_RANGE_ANGSTROM

FIELDS = (
    Field(base=ENDS[0], meaning="native residue and its number, such as D171 or Asp171"),
    Field(base=ENDS[1], meaning="the other residue of the pair"),
    Field(
        base="distance", units=("A", "nm"), values=allowed.number(least=_LOW_A, most=_HIGH_A),
        meaning="distance of their side chains",
    ),
    Field(base="citation", required=False, values=allowed.line(), meaning="where it is published"),
    Field(base="definition", required=False, values=allowed.line(), meaning="what was measured, and how"),
)  # fmt: skip


@dataclass(frozen=True, kw_only=True, slots=True)
class StatedDistance:
    """One row of the table."""

    residues: tuple[Residue, Residue]  # in residue order
    angstrom: float
    citation: str | None
    definition: str | None
    origin: Origin


@dataclass(frozen=True, kw_only=True, slots=True)
class DistancesRead:
    """The distances that are stated."""

    stated: tuple[StatedDistance, ...] = ()
    readable: bool = True  # False when nothing could be read


def read_distances(raw: RawTable, findings: Findings) -> DistancesRead:
    """Read the table ``distances``; faults go to `findings`."""
    table = Table(raw, FIELDS, findings)
    ends = [_residues(table, end) for end in ENDS]
    angstrom = _angstrom(table)
    citation, definition = table.text("citation"), table.text("definition")
    table.check_decimal_mark()
    pairs = _pairs(table, *ends)
    keys = [("", "", "") if pair is None else (str(pair[0]), str(pair[1]), "") for pair in pairs]
    refuse_repeated(table, ENDS[0], range(len(table)), keys) if table.readable else None
    stated = (
        StatedDistance(
            residues=pair, angstrom=float(angstrom[i]), citation=str(citation[i]) or None,
            definition=str(definition[i]) or None, origin=table.origin(i),
        )
        for i, pair in enumerate(pairs)
        if pair is not None and np.isfinite(angstrom[i])
    )  # fmt: skip
    return DistancesRead(stated=tuple(sorted(stated, key=lambda one: one.residues)), readable=table.readable)


def _residues(table: Table, end: str) -> list[Residue | None]:
    """Read a column of residues; None where it holds none, which is a fault."""
    residues = []
    for index, text in enumerate(table.labels(end).tolist()):
        residue = parse_residue(text)
        residues.append(residue)
        if residue is None and text and text.isprintable():
            table.refuse(
                index, end, found=shown(text), expected="a native residue such as D171 or Asp171",
                remedy=_remedy(text),
            )  # fmt: skip
    return residues


def _remedy(text: str) -> str:
    """What to do about a text that is no residue."""
    mutation = parse_mutation(text)
    if mutation is not None:
        return f"write {mutation.native}{mutation.position}: the distance is that of the native residues"
    letters = text.rstrip("0123456789")
    meant = parse_residue(letters.strip().capitalize() + text[len(letters) :])
    return f"write {meant}" if meant is not None else "write the one-letter code and the residue's number"


def _angstrom(table: Table) -> FloatArray:
    """Read the distances in angstrom, shape (n_rows,); NaN where there is none that is possible."""
    distance = table.numbers("distance")
    if "distance" in table and table.unit("distance") == "nm":
        distance = np.round(distance * ANGSTROM_PER_NM, 9)
    wrong = table.outside("distance", distance)
    for index in np.flatnonzero(wrong):
        table.refuse(
            int(index), "distance", found=f"{distance[index]:g} A",
            expected=f"the distance of two side chains, {_LOW_A:g} to {_HIGH_A:g} A",
            remedy="correct the value, or the unit in the header (distance_A, distance_nm)",
        )  # fmt: skip
    return np.where(wrong, np.nan, distance)


def _pairs(
    table: Table, ones: Sequence[Residue | None], others: Sequence[Residue | None]
) -> list[tuple[Residue, Residue] | None]:
    """Put the two residues of each row in order; a residue with itself is a fault."""
    pairs: list[tuple[Residue, Residue] | None] = []
    for index, (one, other) in enumerate(zip(ones, others, strict=True)):
        if one is None or other is None:
            pairs.append(None)
        elif one.position == other.position:
            pairs.append(None)
            table.refuse(
                index, ENDS[1], found=f"{other}, at the same position as residue_a",
                expected="two residues", remedy="correct one of the two",
            )  # fmt: skip
        else:
            pairs.append((min(one, other), max(one, other)))
    return pairs
