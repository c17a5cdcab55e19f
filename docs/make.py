"""Writes what the package knows of its file formats into this folder; run it after changing any of them."""

import json
import re
from pathlib import Path

from cornerwise import schemas
from cornerwise.columns import ENERGY, OUTPUT_TABLES, OutputTable

HERE = Path(__file__).parent
UNITS = {ENERGY: "`energy_unit`", "1": ""}


def schema_files() -> dict[str, str]:
    """Text of every file below ``schemas``, by its name."""
    return {
        f"{name}.json": json.dumps(schema, indent=1, ensure_ascii=False) + "\n"
        for name, schema in schemas().items()
    }


def reference(table: OutputTable) -> str:
    """Rows of a table's reference: column, type, unit, meaning."""
    lines = ["| column | type | unit | meaning |", "|---|---|---|---|"]
    for column in table.columns:
        words = ": " + ", ".join(f"`{word}`" for word in column.words) if column.words else ""
        kind = column.type if column.needed else f"{column.type}?"
        lines.append(
            f"| `{column.name}` | {kind} | {UNITS.get(column.unit, column.unit)} | {column.meaning}{words} |"
        )
    return "\n".join(lines)


def outputs_page(page: str) -> str:
    """The page ``outputs.md`` with the rows of every table renewed."""
    for name, table in OUTPUT_TABLES.items():
        heading = f"## `{name}.csv`\n\n"
        before, _, after = page.partition(heading)
        rest = re.sub(r"\A(\|.*\n)*\n*", "", after)
        page = f"{before}{heading}{reference(table)}\n" + (f"\n{rest}" if rest else "")
    return page


if __name__ == "__main__":
    for name, text in schema_files().items():
        place = HERE / "schemas" / name
        place.parent.mkdir(parents=True, exist_ok=True)
        place.write_text(text, encoding="utf-8")
    page = HERE / "outputs.md"
    page.write_text(outputs_page(page.read_text(encoding="utf-8")), encoding="utf-8")
