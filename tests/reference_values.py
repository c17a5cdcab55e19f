"""Outside values with their passports."""

import json
from pathlib import Path
from typing import Any

_FOLDER = Path(__file__).parent / "reference"


def load(name: str) -> dict[str, Any]:
    """Read a reference file; one without a source and a tolerance is refused."""
    values: dict[str, Any] = json.loads((_FOLDER / f"{name}.json").read_text(encoding="utf-8"))
    missing = {"source", "tolerance", "tolerance_reason"} - values.keys()
    if missing:
        raise ValueError(f"{name}.json lacks {', '.join(sorted(missing))}")
    return values
