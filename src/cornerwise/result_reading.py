"""``result.json`` back to a result; anything but what this version wrote, unedited, is refused."""

from __future__ import annotations

import dataclasses
import json
import math
import os
import sys
import types
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any, Literal, NoReturn, Union, get_args, get_origin, get_type_hints

from .campaign import InputFile, Settings
from .errors import DataRefused, Origin, Problem, visible
from .flags import Flag
from .plan_rows import NextStepRow
from .result import SCHEMA, Result, checksum
from .rows import BackgroundRow, BudgetRow, CellRow, ConstructRow, InteractionRow
from .tables import Row, Table

TABLES: Mapping[str, type[Row]] = {
    "interactions": InteractionRow,
    "constructs": ConstructRow,
    "cells": CellRow,
    "budget": BudgetRow,
    "backgrounds": BackgroundRow,
    "next_steps": NextStepRow,
}
_OTHERS = ("schema", "settings", "energy_threshold", "energy_tolerance", "background", "flags", "notes",
           "inputs", "versions")  # fmt: skip
MOST_BYTES = 100_000_000
_AGAIN = "compute the campaign again with cornerwise couple --out"


class _Misfit(Exception):
    """A value that is not of the type its place has."""

    def __init__(self, place: str, found: object, expected: str) -> None:
        super().__init__(place)
        self.place, self.found, self.expected = place, found, expected


def _refuse(file: str, found: str, expected: str, place: str = "") -> NoReturn:
    origin = Origin(file=visible(file), column=visible(place)[:80] or None)
    raise DataRefused([Problem(origin=origin, found=visible(found), expected=expected, remedy=_AGAIN)])


def read_result(path: str | os.PathLike[str]) -> Result:
    """Read what `Result.to_json` wrote.

    Parameters
    ----------
    path : str or path-like
        A ``result.json``, the folder of output that holds one, or ``-`` for standard input.

    Returns
    -------
    Result
        Equal to the one that was written: its `to_json` gives the same bytes.

    Raises
    ------
    DataRefused
        If the file cannot be read, is cut short, has another schema version, was edited, or holds a field
        that is missing, unknown or of the wrong type; names the place.
    """
    file, data = str(path), b""
    try:
        if file == "-":
            file, data = "standard input", sys.stdin.buffer.read(MOST_BYTES + 1)
        else:
            place = Path(path) / "result.json" if Path(path).is_dir() else Path(path)
            with place.open("rb") as stream:
                data = stream.read(MOST_BYTES + 1)
        text = data.decode("utf-8")
    except UnicodeDecodeError:
        _refuse(file, "no result.json: bytes that are no text", "a result.json written by cornerwise")
    except OSError as error:
        _refuse(file, f"no readable file ({error})", "a result.json written by cornerwise")
    if len(data) > MOST_BYTES:
        _refuse(file, f"more than {MOST_BYTES / 1e6:.0f} MB", "a result.json written by cornerwise")
    document = _document(file, text)
    try:
        result = _result(document)
    except _Misfit as misfit:
        _refuse(file, repr(misfit.found)[:80], misfit.expected, misfit.place)
    _check_names(file, result)
    for name in ("energy_threshold", "energy_tolerance"):
        if document[name] != getattr(result.settings, name):
            _refuse(file, f"{document[name]!r}"[:80], f"{getattr(result.settings, name)!r}", name)
    return result


def _document(file: str, text: str) -> dict[str, Any]:
    def refuse_constant(name: str) -> NoReturn:
        _refuse(file, name, "a number or null")

    try:
        document = json.loads(text, parse_constant=refuse_constant)
    except json.JSONDecodeError as error:
        _refuse(file, f"no JSON from line {error.lineno}, column {error.colno} on", "a whole result.json")
    except DataRefused:
        raise
    except (ValueError, RecursionError):  # numbers of thousands of digits, lists in lists without end
        _refuse(file, "JSON that this program never writes", "a whole result.json")
    if not isinstance(document, dict) or "schema" not in document:
        _refuse(file, "no schema", f'"schema": "{SCHEMA}"')
    if document["schema"] != SCHEMA:
        _refuse(file, f"schema {document['schema']!r}"[:80], f"schema {SCHEMA!r}", "schema")
    stated = document.pop("checksum", None)
    try:
        sound = stated == checksum(document)
    except (ValueError, RecursionError):  # numbers beyond every bound
        sound = False
    if not sound:
        _refuse(file, "contents that do not match their checksum", "a file that was not edited", "checksum")
    return document


def _result(document: Mapping[str, Any]) -> Result:
    _check_parts(document)
    tables = {
        name: Table(kind, [_build(kind, row, f"{name} {i + 1}") for i, row in enumerate(document[name])])
        for name, kind in TABLES.items()
    }
    return Result(
        settings=_build(Settings, document["settings"], "settings"),
        background=tuple(document["background"]),
        flags=tuple(_build(Flag, flag, f"flags {i + 1}") for i, flag in enumerate(document["flags"])),
        notes=tuple(document["notes"]),
        inputs=tuple(_build(InputFile, one, f"inputs {i + 1}") for i, one in enumerate(document["inputs"])),
        versions=dict(document["versions"]),
        **tables,
    )


def _check_parts(document: Mapping[str, Any]) -> None:
    """Every part must be there, as a list or an object of texts."""
    for name in (*(n for n in _OTHERS if n not in document), *(document.keys() - {*_OTHERS, *TABLES})):
        raise _Misfit(name, document.get(name, "nothing"), "the parts of a result")
    for name in ("energy_threshold", "energy_tolerance"):
        _value(float, document[name], name)
    for name in ("background", "flags", "notes", "inputs", *TABLES):
        if not isinstance(document.get(name), list):
            raise _Misfit(name, document.get(name, "nothing"), "a list")
    for name in ("background", "notes"):
        _several((str, ...), document[name], name)
    versions = document.get("versions")
    if not isinstance(versions, dict) or not all(map(_is_text, (*versions, *versions.values()))):
        raise _Misfit("versions", versions, "names and versions")


def _check_names(file: str, result: Result) -> None:
    """Every corner of a cycle must be among the constructs."""
    labels = {row.construct for row in result.constructs}
    for row in result.interactions:
        for label, _ in row.corners:
            if label not in labels:
                _refuse(file, f"corner {label!r} of {row.cycle}", "one of the constructs", "interactions")


def _build(kind: type[Any], value: object, place: str) -> Any:
    """A dataclass from the object that `dataclasses.asdict` made of it, checked field by field."""
    if not isinstance(value, dict):
        raise _Misfit(place, value, f"the fields of {kind.__name__}")
    hints = get_type_hints(kind)
    names = [field.name for field in dataclasses.fields(kind)]
    for name in (*(n for n in names if n not in value), *(n for n in value if n not in names)):
        raise _Misfit(f"{place} {name}", value.get(name, "nothing"), f"the fields of {kind.__name__}")
    return kind(**{name: _value(hints[name], value[name], f"{place} {name}") for name in names})


def _value(hint: Any, value: object, place: str) -> Any:
    origin = get_origin(hint)
    if origin in (Union, types.UnionType):
        return _first(get_args(hint), value, place)
    if origin is Literal:
        if value in get_args(hint):
            return value
        raise _Misfit(place, value, f"one of {', '.join(map(str, get_args(hint)))}")
    if origin is tuple:
        return _several(get_args(hint), value, place)
    if isinstance(hint, type) and dataclasses.is_dataclass(hint):
        return _build(hint, value, place)
    if _PLAIN[hint](value):
        return value
    raise _Misfit(place, value, f"{hint.__name__}")


def _first(hints: tuple[Any, ...], value: object, place: str) -> Any:
    """Value as the first of several types that fits."""
    misfit = None
    for hint in hints:
        try:
            return _value(hint, value, place)
        except _Misfit as error:
            misfit = misfit or error
    assert misfit is not None
    raise misfit


def _several(hints: tuple[Any, ...], value: object, place: str) -> tuple[Any, ...]:
    if not isinstance(value, list):
        raise _Misfit(place, value, "a list")
    if hints[-1] is Ellipsis:
        return tuple(_value(hints[0], one, f"{place} {i + 1}") for i, one in enumerate(value))
    if len(hints) != len(value):
        raise _Misfit(place, value, f"{len(hints)} values")
    return tuple(_value(hint, one, place) for hint, one in zip(hints, value, strict=True))


def _is_text(value: object) -> bool:
    return isinstance(value, str) and value.isprintable()


def _is_number(value: object) -> bool:
    if isinstance(value, int):
        return not isinstance(value, bool) and abs(value) < 2**63
    return isinstance(value, float) and math.isfinite(value)


_PLAIN: Mapping[Any, Callable[[object], bool]] = {
    str: _is_text,
    bool: lambda value: isinstance(value, bool),
    int: lambda value: isinstance(value, int) and _is_number(value),
    float: _is_number,
    types.NoneType: lambda value: value is None,
}
