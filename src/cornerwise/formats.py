"""The file formats as schemas: what the intake judges by, and what a result is read back into."""

from __future__ import annotations

from typing import Any

from .columns import ENERGY, OUTPUT_TABLES, Column, OutputTable
from .intake.campaign_schema import campaign_schema
from .intake.table_schemas import PROFILE, table_schemas
from .result_schema import result_schema


def schemas() -> dict[str, dict[str, Any]]:
    """Schemas of every file that is read or written.

    Returns
    -------
    dict of str to dict
        ``campaign`` and ``result``: JSON Schema, draft 2020-12, of ``campaign.toml`` and ``result.json``.
        ``input/...`` and ``output/...``: Table Schema, version 2.0, of the tables that are read and of the
        CSV files of ``--out``.

    Examples
    --------
    >>> schemas()["campaign"]["properties"]["confidence"]["exclusiveMinimum"]
    0.5
    >>> [field["name"] for field in schemas()["output/budget"]["fields"]]
    ['cycle', 'source', 'contribution', 'share']
    """
    return {
        "campaign": campaign_schema(),
        "result": result_schema(),
        **{f"input/{name}": schema for name, schema in table_schemas().items()},
        **{f"output/{name}": _output_schema(table) for name, table in OUTPUT_TABLES.items()},
    }


def _output_schema(table: OutputTable) -> dict[str, Any]:
    return {
        "$schema": PROFILE,
        "title": table.title,
        "fields": [_field(column) for column in table.columns],
        "missingValues": [""],
    }


def _field(column: Column) -> dict[str, Any]:
    constraints: dict[str, Any] = {"required": True} if column.needed else {}
    if column.words:
        constraints["enum"] = list(column.words)
    unit = "that of the column energy_unit" if column.unit == ENERGY else column.unit
    return {
        "name": column.name,
        "description": column.meaning,
        "type": column.type,
        **({"constraints": constraints} if constraints else {}),
        **({"cornerwise:unit": unit} if unit else {}),
    }
