"""The JSON Schema of ``result.json``, from the dataclasses that it is read back into."""

from __future__ import annotations

import dataclasses
import types
from collections.abc import Mapping
from typing import Any, Literal, Union, get_args, get_origin, get_type_hints

from .campaign import InputFile, Settings
from .flags import Flag
from .result import SCHEMA
from .result_reading import TABLES

_ABOUT = "Everything that cornerwise couple found; energies are per channel, in settings.energy_unit."
_PLAIN: Mapping[Any, dict[str, Any]] = {
    str: {"type": "string"},
    bool: {"type": "boolean"},
    int: {"type": "integer"},
    float: {"type": "number"},
    types.NoneType: {"type": "null"},
}


def result_schema() -> dict[str, Any]:
    """JSON Schema, draft 2020-12, of ``result.json``.

    Returns
    -------
    dict
        A new one each time. Every field must be there, and no other; a field that does not apply is null.
        That the file was not edited is told by its checksum, which no schema can test.
    """
    kinds: dict[str, Any] = {}
    texts = _array({"type": "string"})
    properties = {
        "schema": {"const": SCHEMA},
        "settings": _schema(Settings, kinds),
        "energy_threshold": {"type": "number"},
        "energy_tolerance": {"type": "number"},
        "background": texts,
        **{name: _array(_schema(kind, kinds)) for name, kind in TABLES.items()},
        "flags": _array(_schema(Flag, kinds)),
        "notes": texts,
        "inputs": _array(_schema(InputFile, kinds)),
        "versions": {"type": "object", "additionalProperties": {"type": "string"}},
        "checksum": {"type": "string", "pattern": "^[0-9a-f]{64}$"},
    }
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "$id": f"urn:{SCHEMA.replace('/', ':')}",
        "title": "result.json",
        "description": _ABOUT,
        **_object(properties),
        "$defs": dict(sorted(kinds.items())),
    }


def _object(properties: dict[str, Any]) -> dict[str, Any]:
    return {
        "type": "object",
        "properties": properties,
        "required": list(properties),
        "additionalProperties": False,
    }


def _array(items: dict[str, Any]) -> dict[str, Any]:
    return {"type": "array", "items": items}


def _schema(hint: Any, kinds: dict[str, Any]) -> dict[str, Any]:
    """What a value of a type is written as; dataclasses go to `kinds` and are referred to."""
    origin = get_origin(hint)
    if origin in (Union, types.UnionType):
        return _any_of([_schema(one, kinds) for one in get_args(hint)])
    if origin is Literal:
        return {"enum": list(get_args(hint))}
    if origin is tuple:
        return _tuple(get_args(hint), kinds)
    if isinstance(hint, type) and dataclasses.is_dataclass(hint):
        return _record(hint, kinds)
    return dict(_PLAIN[hint])


def _any_of(schemas: list[dict[str, Any]]) -> dict[str, Any]:
    """Several plain types in one line, anything else side by side."""
    if all(schema.keys() == {"type"} for schema in schemas):
        return {"type": [schema["type"] for schema in schemas]}
    return {"anyOf": schemas}


def _tuple(hints: tuple[Any, ...], kinds: dict[str, Any]) -> dict[str, Any]:
    if hints[-1] is Ellipsis:
        return _array(_schema(hints[0], kinds))
    members = [_schema(hint, kinds) for hint in hints]
    return {"type": "array", "prefixItems": members, "items": False, "minItems": len(members)}


def _record(kind: type[Any], kinds: dict[str, Any]) -> dict[str, Any]:
    if kind.__name__ not in kinds:
        hints = get_type_hints(kind)
        names = [field.name for field in dataclasses.fields(kind)]
        kinds[kind.__name__] = {}  # holds its place, so that a kind may hold others of its own
        kinds[kind.__name__] = _object({name: _schema(hints[name], kinds) for name in names})
    return {"$ref": f"#/$defs/{kind.__name__}"}
