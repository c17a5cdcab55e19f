"""A result in another energy unit, from full precision and without computing anything again."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Mapping
from functools import cache, partial
from typing import Annotated, Any, get_args, get_origin, get_type_hints

from .campaign import Settings
from .coupling import ranking_notes
from .errors import UsageError
from .flags import Flag
from .interaction_rows import charges_that_do_not_add_up
from .intervals import Interval
from .midpoints import misleading_midpoint
from .result import ConstructRow, InteractionRow, Result
from .tables import Row, Table
from .units import ENERGY, ENERGY_UNITS, EnergyUnit, convert_energy

Change = Callable[[float], float]
_TABLES = ("interactions", "constructs", "cells", "budget", "backgrounds", "next_steps")


def in_unit(result: Result, unit: str) -> Result:
    """Give a result in another energy unit.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` or `cornerwise.read_result` returned.
    unit : {"kcal/mol", "kJ/mol", "kT", "meV"}
        Energy unit; kT is that of the campaign's temperature.

    Returns
    -------
    Result
        What `couple` would have given with this unit in the settings, to the last digits; the same object
        if that is its unit already. Sentences that quote an energy are put in the new unit.

    Raises
    ------
    UsageError
        If the unit is none of the four.
    """
    target = _known(unit)
    if target == result.settings.energy_unit:
        return result
    change = partial(
        convert_energy,
        unit=result.settings.energy_unit,
        target=target,
        temperature_c=result.settings.temperature_c,
    )
    tables: dict[str, Any] = {name: _table(getattr(result, name), change, target) for name in _TABLES}
    changed = dataclasses.replace(result, settings=_settings(result.settings, change, target), **tables)
    return dataclasses.replace(changed, flags=_flags(changed, change), notes=_notes(result, changed))


def _known(unit: str) -> EnergyUnit:
    for one in ENERGY_UNITS:
        if one == unit:
            return one
    raise UsageError(f"energy unit {unit!r} is not known; use one of {', '.join(ENERGY_UNITS)}")


def _settings(settings: Settings, change: Change, unit: EnergyUnit) -> Settings:
    stated = tuple(key for key in settings.defaulted if key != "energy_unit")
    changed: Settings = _record(settings, change, unit)
    return dataclasses.replace(changed, defaulted=stated)


def _table(table: Table[Row], change: Change, unit: EnergyUnit) -> Table[Row]:
    return Table(table.kind, [_record(row, change, unit) for row in table])


@cache
def _energies(kind: type[Any]) -> frozenset[str]:
    """Names of the fields that are marked as energies in the campaign's unit."""
    hints = get_type_hints(kind, include_extras=True)
    return frozenset(name for name, hint in hints.items() if _is_energy(hint))


def _is_energy(hint: object) -> bool:
    if get_origin(hint) is Annotated:
        return ENERGY in get_args(hint)[1:]
    return any(map(_is_energy, get_args(hint)))


def _record(record: Any, change: Change, unit: EnergyUnit) -> Any:
    """The record with its energies, and those of the records inside it, in the new unit."""
    energies = _energies(record.__class__)
    new: dict[str, object] = {}
    for field in dataclasses.fields(record):
        value = getattr(record, field.name)
        if field.name == "energy_unit":
            new[field.name] = unit
        elif field.name in energies and value is not None:
            new[field.name] = change(value)
        elif isinstance(value, tuple) and value and dataclasses.is_dataclass(value[0]):
            new[field.name] = tuple(_record(one, change, unit) for one in value)
    return dataclasses.replace(record, **new)


def _flags(changed: Result, change: Change) -> tuple[Flag, ...]:
    constructs = {row.construct: row for row in changed.constructs}
    cycles = {row.cycle: row for row in changed.interactions}
    return tuple(_flag(flag, constructs, cycles, change, changed.settings) for flag in changed.flags)


def _flag(
    flag: Flag,
    constructs: Mapping[str, ConstructRow],
    cycles: Mapping[str, InteractionRow],
    change: Change,
    settings: Settings,
) -> Flag:
    """A flag whose sentence quotes an energy, in the new unit; any other as it is."""
    if flag.value is None or flag.limit is None:
        return flag
    if flag.code == "midpoint-misleads":
        row = constructs[flag.subject]
        if row.midpoint_mv is None or row.median_mv is None:
            return flag
        value, limit = change(flag.value), change(flag.limit)
        message = misleading_midpoint(
            flag.subject, row.midpoint_mv - row.median_mv, value, limit, settings.energy_unit
        )
        return dataclasses.replace(flag, value=value, limit=limit, message=message)
    if flag.code == "charge-nonadditive":
        cycle = cycles[flag.subject]
        low, high = cycle.charge_interaction_low, cycle.charge_interaction_high
        if low is None or high is None or cycle.change_per_10_mv is None:
            return flag
        message = charges_that_do_not_add_up(
            flag.subject, flag.value, Interval(low, high), cycle.change_per_10_mv, settings.energy_unit
        )
        return dataclasses.replace(flag, message=message)
    return flag


def _notes(result: Result, changed: Result) -> tuple[str, ...]:
    """Notes with those that quote an energy in the new unit."""
    old, new = (ranking_notes(tuple(one.interactions)) for one in (result, changed))
    in_new_words = dict(zip(old, new, strict=True))
    return tuple(in_new_words.get(note, note) for note in result.notes)
