"""Outside values with their passports."""

import json
from pathlib import Path
from typing import Any

_FOLDER = Path(__file__).parent / "reference"


def load(name: str) -> dict[str, Any]:
    """Read a reference file; one without sources and a tolerance is refused.

    Every source says either where its digits were read or that they are from memory.
    """
    values: dict[str, Any] = json.loads((_FOLDER / f"{name}.json").read_text(encoding="utf-8"))
    missing = {"source", "tolerance", "tolerance_reason"} - values.keys()
    if missing:
        raise ValueError(f"{name}.json lacks {', '.join(sorted(missing))}")
    for key, passport in values["source"].items():
        if passport.keys() not in ({"read"}, {"memory"}):
            raise ValueError(f"{name}.json: {key} says neither where it was read nor that it is from memory")
    return values


def all_sources() -> dict[str, dict[str, str]]:
    """Passports of all reference files, by short name."""
    found: dict[str, dict[str, str]] = {}
    for path in sorted(_FOLDER.glob("*.json")):
        for key, passport in load(path.stem)["source"].items():
            if key in found:
                raise ValueError(f"{key} has two passports")
            found[key] = passport
    return found
