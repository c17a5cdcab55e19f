"""What comes out: everything `couple` found, and its text as JSON."""

from __future__ import annotations

import dataclasses
import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from .campaign import InputFile, Settings
from .flags import Flag
from .plan_rows import NextStepRow
from .rows import (
    BackgroundRow,
    Breakdown,
    BudgetRow,
    CellRow,
    ConstructRow,
    CornerCharge,
    DrawnCurve,
    Edge,
    InteractionRow,
    MidpointRow,
    ProfilePoint,
    RankRow,
    SubunitRow,
)
from .tables import Row, Table, Value

if TYPE_CHECKING:
    import pandas as pd

# A result's tables and rows are fetched from here.
__all__ = [
    "SCHEMA",
    "BackgroundRow",
    "Breakdown",
    "BudgetRow",
    "CellRow",
    "ConstructRow",
    "CornerCharge",
    "DrawnCurve",
    "Edge",
    "InteractionRow",
    "MidpointRow",
    "NextStepRow",
    "ProfilePoint",
    "RankRow",
    "Result",
    "Row",
    "SubunitRow",
    "Table",
    "Value",
]

SCHEMA = "cornerwise-result/2"


def _shared(energy: float | None, subunits: int) -> float | None:
    return None if energy is None else energy / subunits


@dataclass(frozen=True, kw_only=True, slots=True)
class Result:
    """Everything `couple` found; what the files, tables and figures are rendered from."""

    settings: Settings
    background: tuple[str, ...]  # mutations carried by every construct
    interactions: Table[InteractionRow]  # by order, then in residue order
    constructs: Table[ConstructRow]  # the wild type first
    cells: Table[CellRow]
    budget: Table[BudgetRow]
    backgrounds: Table[BackgroundRow]  # of the cycles of order 3 and above
    next_steps: Table[NextStepRow]  # of the cycles that are unresolved
    flags: tuple[Flag, ...]
    notes: tuple[str, ...]  # decisions the reader should know of, a sentence each
    inputs: tuple[InputFile, ...]
    versions: dict[str, str]

    @property
    def midpoints(self) -> Table[MidpointRow]:
        """What the older literature quotes, for the constructs that have curves."""
        names = [field.name for field in dataclasses.fields(MidpointRow)]
        rows = [
            MidpointRow(**{name: getattr(row, name) for name in names})
            for row in self.constructs
            if row.midpoint_mv is not None
        ]
        return Table(MidpointRow, rows)

    @property
    def per_subunit(self) -> Table[SubunitRow]:
        """Interaction energies divided by the number of subunits; empty for a protein of one."""
        count = self.settings.subunits
        rows = [
            SubunitRow(
                cycle=row.cycle,
                subunits=count,
                interaction_per_channel=row.interaction,
                interaction_per_subunit=_shared(row.interaction, count),
                std_uncertainty_per_subunit=_shared(row.std_uncertainty, count),
                low_per_subunit=_shared(row.low, count),
                high_per_subunit=_shared(row.high, count),
                energy_unit=row.energy_unit,
            )
            for row in self.interactions
        ]
        return Table(SubunitRow, rows if count > 1 else [])

    @property
    def ranking(self) -> Table[RankRow]:
        """The cycles that have an uncertainty, in the order of their ranks."""
        names = [field.name for field in dataclasses.fields(RankRow)]
        ranked = [row for row in self.interactions if row.rank is not None]
        rows = [
            RankRow(**{name: getattr(row, name) for name in names})
            for row in sorted(ranked, key=lambda row: row.rank or 0)
        ]
        return Table(RankRow, rows)

    def to_frame(self) -> pd.DataFrame:
        """The interactions as a data frame; see `interactions`, `constructs`, `cells`, `budget`."""
        return self.interactions.to_frame()

    def to_json(self) -> str:
        """Text of ``result.json``: everything, full precision, no NaN, the same bytes each time."""
        document = {
            "schema": SCHEMA,
            "settings": _plain(self.settings),
            "energy_threshold": self.settings.energy_threshold,
            "energy_tolerance": self.settings.energy_tolerance,
            "background": self.background,
            "interactions": [_plain(row) for row in self.interactions],
            "constructs": [_plain(row) for row in self.constructs],
            "cells": [_plain(row) for row in self.cells],
            "budget": [_plain(row) for row in self.budget],
            "backgrounds": [_plain(row) for row in self.backgrounds],
            "next_steps": [_plain(row) for row in self.next_steps],
            "flags": [_plain(flag) for flag in self.flags],
            "notes": self.notes,
            "inputs": [_plain(file) for file in self.inputs],
            "versions": self.versions,
        }
        document["checksum"] = checksum(document)
        return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def checksum(document: Mapping[str, object]) -> str:
    """SHA-256 of a result's contents, so that an edited ``result.json`` is told from what was computed."""
    text = json.dumps(document, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()


def _plain(record: object) -> dict[str, object]:
    assert dataclasses.is_dataclass(record)
    assert not isinstance(record, type)
    return dataclasses.asdict(record)
