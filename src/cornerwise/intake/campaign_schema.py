"""The JSON Schema of ``campaign.toml``, put together from the fragments that the intake judges by."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping, Sequence
from typing import Any

from ..campaign import Settings
from . import allowed
from .exclusions import EXCLUDE_KEYS, EXPECTED
from .listed import FEWEST_MUTATIONS, WORDS
from .rules import Rule, visible_text
from .settings import CHARGE_RULES, CHARGE_WORD, NEEDED, RULES
from .structure import STRUCTURE_RULES, StructureRequest

DIALECT = "https://json-schema.org/draft/2020-12/schema"

_ABOUT = (
    "What each key may hold. The program also compares keys and tables with one another: cornerwise check "
    "tells everything. The format visible-text excludes the invisible letters that no pattern can name."
)
_NAMED = {"label": allowed.label(), "line": allowed.line()}


def campaign_schema() -> dict[str, Any]:
    """JSON Schema, draft 2020-12, of ``campaign.toml``; no other key is allowed.

    Returns
    -------
    dict
        A new one each time. It allows every campaign that is read, and refuses wrong types, values out of
        range and unknown keys as the intake does.
    """
    defaults = {field.name: field.default for field in dataclasses.fields(Settings)}
    plain = {rule.key: _property(rule, defaults[rule.attribute]) for rule in RULES}
    tables = {
        "charge": _charge(), "mutations": _mutations(), "cycle": _cycles(), "exclude": _exclusions(),
        "structure": _structure(),
    }  # fmt: skip
    document: dict[str, Any] = _short(_table({**plain, **tables}, needed=("wild_type",)))
    return {
        "$schema": DIALECT,
        "$id": "urn:cornerwise:campaign:1",
        "title": "campaign.toml",
        "description": _ABOUT,
        **document,
        "$defs": {name: dict(fragment) for name, fragment in _NAMED.items()},
    }


def _short(part: Any) -> Any:
    """The same schema with the long fragments called by their names."""
    if isinstance(part, list):
        return [_short(one) for one in part]
    if not isinstance(part, Mapping):
        return part
    for name, fragment in _NAMED.items():
        if fragment.items() <= part.items():
            rest = {word: stated for word, stated in part.items() if word not in fragment}
            return {"$ref": f"#/$defs/{name}", **rest}
    return {word: _short(stated) for word, stated in part.items()}


def _property(rule: Rule, default: object = None) -> dict[str, Any]:
    stated = {"default": default} if isinstance(default, bool | int | float | str) else {}
    return {"description": rule.expected, **rule.read.schema, **stated}


def _table(properties: Mapping[str, Any], *, needed: Sequence[str]) -> dict[str, Any]:
    return {
        "type": "object",
        "properties": dict(properties),
        "required": list(needed),
        "additionalProperties": False,
    }


def _charge() -> dict[str, Any]:
    stated = _table({rule.key: _property(rule) for rule in CHARGE_RULES}, needed=NEEDED)
    return {
        "description": "each construct its own charge, the wild type's for all, or one that is stated",
        "anyOf": [CHARGE_WORD.schema, stated],
        "default": Settings(wild_type="").charge,
    }


def _mutations() -> dict[str, Any]:
    return {
        "description": "mutations of the constructs whose labels do not spell them, by label",
        "type": "object",
        "additionalProperties": WORDS,
    }


def _cycles() -> dict[str, Any]:
    name = {"description": "what the cycle is called instead of by its mutations", **visible_text.schema}
    mutations = {"description": "mutations of the cycle", **WORDS, "minItems": FEWEST_MUTATIONS}
    return {
        "description": "cycles to compute; without any, all complete ones are found",
        **allowed.items(_table({"name": name, "mutations": mutations}, needed=("mutations",))),
    }


def _exclusions() -> dict[str, Any]:
    keys = {key: {"description": EXPECTED[key], **visible_text.schema} for key in EXCLUDE_KEYS}
    return {
        "description": "cells to set aside",
        **allowed.items(_table(keys, needed=EXCLUDE_KEYS)),
    }


def _structure() -> dict[str, Any]:
    defaults = {field.name: field.default for field in dataclasses.fields(StructureRequest)}
    keys = {rule.key: _property(rule, defaults[rule.attribute]) for rule in STRUCTURE_RULES}
    return {
        "description": "a structure in which the side-chain distances of the pairs are measured",
        **_table(keys, needed=("file",)),
    }
