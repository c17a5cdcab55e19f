"""Table Schemas of the tables that are read, from the very fields that the intake looks for.

References
----------
Table Schema of the Data Package standard, version 2.0 (frictionless).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from . import charges, curves, distances, medians, openings
from .channels import RAW
from .header import Field
from .layouts import VOLTAGE

PROFILE = "https://datapackage.org/profiles/2.0/tableschema.json"
CELL_HEADER = "[^/].*/[^/]+"  # of the wide layout

_SIZE_OF_UNIT = {"V": 1000.0, "nm": distances.ANGSTROM_PER_NM}  # in the first unit of the field
_CONSTRAINTS = ("minimum", "exclusiveMinimum", "maximum", "exclusiveMaximum", "enum")


@dataclass(frozen=True, kw_only=True, slots=True)
class Layout:
    """One form of a table."""

    title: str
    fields: tuple[Field, ...]
    key: tuple[str, ...]  # fields that no two rows share
    instead: tuple[tuple[str, ...], ...] = ()  # fields of which one at least is needed
    wide: Field | None = None  # what the cells of the wide layout hold


LAYOUTS = {
    "curves": Layout(
        title="charge-voltage curves, a row a point", fields=curves.FIELDS,
        key=("construct", "cell", "voltage"), wide=curves.CHARGE,
    ),
    "medians": Layout(
        title="median voltages, a row a construct", fields=medians.FIELDS, key=("construct",),
    ),
    "charges_of_cells": Layout(
        title="total charges, a row a cell", fields=charges.REPLICATE_FIELDS,
        key=("construct", "cell", "method"), instead=(("charge", RAW),),
    ),
    "charges_of_constructs": Layout(
        title="total charges, a row a construct", fields=charges.SUMMARY_FIELDS,
        key=("construct", "method"), instead=(("n", "citation"),),
    ),
    "openings": Layout(
        title="open probabilities, a row a point", fields=openings.FIELDS,
        key=("construct", "cell", "voltage"), wide=openings.OPEN_PROBABILITY,
    ),
    "distances": Layout(
        title="distances between side chains, a row a pair", fields=distances.FIELDS, key=distances.ENDS,
    ),
}  # fmt: skip


def table_schemas() -> dict[str, dict[str, Any]]:
    """Table Schema of every table that is read, by its name; tables of cells and of constructs apart.

    Returns
    -------
    dict of str to dict
        Every column under every header it may have; a file has some of them (``fieldsMatch``). Of the
        columns in one list of ``cornerwise:needsOneOf`` one at least must be there, and never a quantity in
        two units.
        ``cornerwise:wide`` describes the layout with a column a cell.
    """
    return {name: _schema(layout) for name, layout in LAYOUTS.items()}


def _schema(layout: Layout) -> dict[str, Any]:
    fields = {field.name: field for field in layout.fields}
    replaceable = {name for names in layout.instead for name in names}
    needs = [[header for name in names for header in fields[name].headers] for names in layout.instead]
    needs += [list(field.headers) for field in layout.fields
              if field.required and len(field.units) > 1 and field.name not in replaceable]  # fmt: skip
    schema: dict[str, Any] = {
        "$schema": PROFILE,
        "title": layout.title,
        "fields": [one for field in layout.fields
                   for one in _columns(field, needed=field.required and field.name not in replaceable)],
        "fieldsMatch": "superset",
        "missingValues": [""],
        **_keys([fields[name] for name in layout.key]),
        **({"cornerwise:needsOneOf": needs} if needs else {}),
    }  # fmt: skip
    if layout.wide is not None:
        schema["cornerwise:wide"] = {
            "fields": _columns(VOLTAGE, needed=True),
            "cellHeader": CELL_HEADER,
            "cells": _values(layout.wide, unit="", needed=True),
        }
    return schema


def _keys(fields: Sequence[Field]) -> dict[str, Any]:
    """The primary key; where a column of it may be empty or have another header, keys that are unique."""
    if all(field.required and len(field.units) == 1 for field in fields):
        return {"primaryKey": [field.headers[0] for field in fields]}
    units = max(len(field.units) for field in fields)
    return {"uniqueKeys": [[field.headers[min(place, len(field.units) - 1)] for field in fields]
                           for place in range(units)]}  # fmt: skip


def _columns(field: Field, *, needed: bool) -> list[dict[str, Any]]:
    """One field for each header; a column that may have another header cannot be asked for by name."""
    return [
        {
            "name": header,
            "description": field.meaning,
            **_values(field, unit=unit, needed=needed and len(field.units) == 1),
            **({"cornerwise:unit": unit} if unit else {}),
        }
        for header, unit in zip(field.headers, field.units, strict=True)
    ]


def _values(field: Field, *, unit: str, needed: bool) -> dict[str, Any]:
    """Type and constraints of a column in one of its units."""
    size = _SIZE_OF_UNIT.get(unit, 1)
    constraints: dict[str, Any] = {"required": True} if needed else {}
    for word in _CONSTRAINTS:
        if word in field.values:
            limit = field.values[word]
            constraints[word] = limit if isinstance(limit, list) or size == 1 else limit / size
    return {"type": field.values["type"], **({"constraints": constraints} if constraints else {})}
