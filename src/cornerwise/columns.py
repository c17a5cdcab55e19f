"""What every column of every table that comes out holds: its type, its unit and its meaning.

The one place where this is said; the published Table Schemas and ``docs/outputs.md`` are made of it.
"""

from __future__ import annotations

import types
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal, Union, get_args, get_origin, get_type_hints

from .plan_rows import NeedRow, NextStepRow, OutlookRow, SplitRow
from .rows import (
    BackgroundRow,
    BudgetRow,
    CellRow,
    ConstructRow,
    InteractionRow,
    MidpointRow,
    RankRow,
    SubunitRow,
)
from .tables import Row, field_of_column

ENERGY = "energy_unit"  # stands for the unit that the row names
ColumnType = Literal["string", "boolean", "integer", "number"]
_TYPES: Mapping[Any, ColumnType] = {str: "string", bool: "boolean", int: "integer", float: "number"}

_Meaning = tuple[str, str]  # unit and meaning of a column; what several tables have comes first
_CYCLE: _Meaning = ("", "name of the cycle: its mutations, or the name that campaign.toml gives it")
_CONSTRUCT: _Meaning = ("", "label of the construct, as in the tables that were read")
_UNIT: _Meaning = ("", "unit of the energies in this row, per channel")
_DOF: _Meaning = ("1", "Welch-Satterthwaite degrees of freedom of std_uncertainty")
_MEDIAN: _Meaning = ("mV", "median voltage, the mean over cells")
_INTERACTION: _Meaning = (ENERGY, "interaction energy I, the signed sum of the corners' energies")
_LOW: _Meaning = (ENERGY, "lower limit of the interval that verdicts go by")
_HIGH: _Meaning = (ENERGY, "upper limit of the interval that verdicts go by")
_P_ADJUSTED: _Meaning = ("1", "p value adjusted for the number of cycles")
_VERDICT: _Meaning = ("", "what the interaction's interval and adjusted p value come to")
_FLAGS: _Meaning = ("", "codes of the doubts about this row, separated by spaces")
_RANK: _Meaning = ("1", "place in the order of strength, 1 the strongest")
_RANK_LOW: _Meaning = ("1", "best rank that the data allow")
_RANK_HIGH: _Meaning = ("1", "worst rank that the data allow")
_MIDPOINT: _Meaning = ("mV", "voltage where the scaled curve is one half, the mean over cells")

_INTERACTIONS: Mapping[str, _Meaning] = {
    "cycle": _CYCLE,
    "order": ("1", "number of mutations of the cycle: 2 a pair, 3 a triple"),
    "mutations": ("", "mutations of the cycle in residue order, separated by slashes"),
    "wild_type": ("", "label of the corner without any of them"),
    "interaction": _INTERACTION,
    "energy_unit": _UNIT,
    "std_uncertainty": (ENERGY, "standard uncertainty of the interaction"),
    "dof": _DOF,
    "low": _LOW,
    "high": _HIGH,
    "boot_low": (ENERGY, "lower limit of the bootstrap interval"),
    "boot_high": (ENERGY, "upper limit of the bootstrap interval"),
    "p_value": ("1", "two-sided p value of an interaction of 0, from Student's t"),
    "p_adjusted": _P_ADJUSTED,
    "shortcut": (
        ENERGY,
        "interaction from median voltages and the wild type's charge alone",
    ),
    "shortcut_bias": (
        ENERGY,
        "error of the shortcut by measured charges: interaction less shortcut unless one charge is asked for",
    ),
    "shortcut_bias_low": (ENERGY, "lower limit of the interval of the bias"),
    "shortcut_bias_high": (ENERGY, "upper limit of the interval of the bias"),
    "shortcut_verdict": ("", "whether the shortcut may be used"),
    "charge_interaction_e0": ("e0", "charge interaction J, the signed sum of the corners' total charges"),
    "charge_interaction_low": ("e0", "lower limit of its interval"),
    "charge_interaction_high": ("e0", "upper limit of its interval"),
    "interaction_verdict": _VERDICT,
    "favours": ("", "state that the native interaction favours, where its sign is established"),
    "rank": _RANK,
    "rank_low": _RANK_LOW,
    "rank_high": _RANK_HIGH,
    "flags": _FLAGS,
}

_RANKING: Mapping[str, _Meaning] = {
    "rank": _RANK,
    "cycle": _CYCLE,
    "interaction": _INTERACTION,
    "energy_unit": _UNIT,
    "low": _LOW,
    "high": _HIGH,
    "strength_low": (
        ENERGY,
        "lower limit of the absolute size; 0 where the interval includes 0",
    ),
    "rank_low": _RANK_LOW,
    "rank_high": _RANK_HIGH,
    "first_probability": ("1", "probability of being among the first, as many as the key first says"),
    "shrunken": (ENERGY, "interaction less what chance is likely to have added to it; takes four cycles"),
    "p_adjusted": _P_ADJUSTED,
    "interaction_verdict": _VERDICT,
    "opposite_charges": ("", "whether the native pair carries opposite charges"),
    "distance_A": ("Å", "distance of the pair's side chains, where it is known"),
    "distance_within_chain_A": ("Å", "the same with both residues in one chain of a structure"),
    "distance_across_chains_A": ("Å", "the same with each residue in another chain"),
    "charged_distance_A": ("Å", "distance of their charged atoms, where both carry a charge"),
    "distance_atoms": ("", "the two atoms whose distance it is, their residues and chains"),
    "distance_source": ("", "file the distance comes from, and its citation"),
    "distance_definition": ("", "what the distance is"),
}

_BACKGROUNDS: Mapping[str, _Meaning] = {
    "cycle": ("", "name of the cycle of order 3 or above"),
    "mutations": ("", "mutations that interact, separated by slashes"),
    "background": ("", "mutations that every corner carries, separated by slashes; empty for the wild type"),
    "order": ("1", "number of mutations that interact"),
    "interaction": (ENERGY, "their interaction energy in this background"),
    "energy_unit": _UNIT,
    "std_uncertainty": (ENERGY, "standard uncertainty of the interaction"),
    "dof": _DOF,
    "low": (ENERGY, "lower limit of its propagated interval"),
    "high": (ENERGY, "upper limit of its propagated interval"),
    "p_value": ("1", "two-sided p value of an interaction of 0, not adjusted"),
}

_CONSTRUCTS: Mapping[str, _Meaning] = {
    "construct": _CONSTRUCT,
    "mutations": ("", "mutations against the wild type in residue order, separated by slashes"),
    "cells": ("1", "number of cells whose curves are used, or n of a median that was given"),
    "median_mV": _MEDIAN,
    "median_sem_mV": ("mV", "standard error of the median voltage"),
    "charge_e0": ("e0", "total charge per channel that its energy is formed with"),
    "charge_sem_e0": ("e0", "standard uncertainty of that charge"),
    "charge_n": ("1", "number of values behind that charge"),
    "charge_source": ("", "its method, or whose it is: the wild type's, or a stated one with its citation"),
    "energy": (
        ENERGY,
        "activation free energy at the reference voltage; negative favours activation",
    ),
    "energy_unit": _UNIT,
    "std_uncertainty": (ENERGY, "standard uncertainty of the energy"),
    "dof": _DOF,
    "low": (ENERGY, "lower limit of its propagated interval"),
    "high": (ENERGY, "upper limit of its propagated interval"),
    "charge_ratio": ("1", "its own charge over the wild type's"),
    "charge_ratio_low": ("1", "lower limit of the interval of the ratio"),
    "charge_ratio_high": ("1", "upper limit of the interval of the ratio"),
    "charge_verdict": ("", "whether its charge equals the wild type's; empty for the wild type"),
    "flags": _FLAGS,
}

_CELLS: Mapping[str, _Meaning] = {
    "construct": _CONSTRUCT,
    "cell": ("", "label of the cell"),
    "batch": ("", "donor or day, where it is stated"),
    "median_mV": ("mV", "median voltage of this cell"),
    "midpoint_mV": ("mV", "voltage where its scaled curve is one half"),
    "low_plateau": ("as recorded", "charge at rest, on the cell's own scale"),
    "high_plateau": ("as recorded", "charge when activated, on the cell's own scale"),
    "points": ("1", "number of points of the curve"),
    "used": ("", "whether the cell counts; false where it was set aside"),
    "flags": _FLAGS,
}

_MIDPOINTS: Mapping[str, _Meaning] = {
    "construct": _CONSTRUCT,
    "median_mV": _MEDIAN,
    "energy": (ENERGY, "activation free energy from the median voltage"),
    "energy_unit": _UNIT,
    "midpoint_mV": _MIDPOINT,
    "midpoint_energy": (ENERGY, "the same total charge times the midpoint"),
    "sigmoid_midpoint_mV": ("mV", "midpoint of one sigmoid fitted to each cell, the mean over cells"),
    "slope_charge_e0": ("e0", "apparent charge from the slope of that sigmoid"),
    "sigmoid_energy": (ENERGY, "that apparent charge times that midpoint"),
}

_BUDGET: Mapping[str, _Meaning] = {
    "cycle": _CYCLE,
    "source": ("", "measurement, or other source of error"),
    "contribution": ("that of the cycle", "standard uncertainty of the interaction from this source alone"),
    "share": ("1", "its part of the squared standard uncertainty; all of a cycle add up to 1"),
}

_PER_SUBUNIT: Mapping[str, _Meaning] = {
    "cycle": _CYCLE,
    "subunits": ("1", "number of subunits that carry the mutation"),
    "interaction_per_channel": (ENERGY, "interaction energy, as in interactions.csv"),
    "interaction_per_subunit": (ENERGY, "the same divided by the number of subunits"),
    "std_uncertainty_per_subunit": (ENERGY, "its standard uncertainty"),
    "low_per_subunit": (ENERGY, "lower limit of its interval"),
    "high_per_subunit": (ENERGY, "upper limit of its interval"),
    "energy_unit": ("", "unit of the energies in this row"),
}

_FURTHER: _Meaning = ("1", "further cells with which it is reached, every scatter being what it seems")
_SHARES: _Meaning = ("", "which cells: number, kind and construct, separated by semicolons")

_NEXT_STEPS: Mapping[str, _Meaning] = {
    "cycle": _CYCLE,
    "settled_as": ("", "verdict that is nearest, if the estimate stays where it is"),
    "confidence": ("1", "level of the interval that decides; adjusted for the number of cycles for detected"),
    "half_width": (ENERGY, "half-width of that interval now"),
    "half_width_wanted": (ENERGY, "half-width below which the verdict is due"),
    "next_construct": ("", "construct on which one further cell narrows the interval most"),
    "next_kind": ("", "kind of that cell"),
    "half_width_after_next": (ENERGY, "half-width with that cell, every scatter staying what it is"),
    "further": ("1", "further cells that settle the cycle; empty where no number does"),
    "shares": _SHARES,
    "limit": ("", "where no number of cells does, the largest source that cells do not make smaller"),
    "remedy": ("", "what does make it smaller"),
    "energy_unit": _UNIT,
}

_PLAN: Mapping[str, _Meaning] = {
    "cycle": _CYCLE,
    "order": ("1", "number of mutations of the cycle"),
    "cells_each": ("1", "cells of each kind on every construct; empty for what there is now"),
    "half_width": (ENERGY, "expected half-width of the interval, every scatter being what it seems"),
    "half_width_low": (ENERGY, "half-width that 1 in 10 of the possible outcomes stay below"),
    "half_width_high": (ENERGY, "half-width that 1 in 10 of the possible outcomes exceed"),
    "power": ("1", "probability that the interval of this cycle alone excludes 0 for the true interaction"),
    "power_low": ("1", "power that 1 in 10 of the possible scatters stay below"),
    "power_high": ("1", "power that 1 in 10 of the possible scatters exceed"),
    "assurance": ("1", "power averaged over the possible scatters"),
    "true_interaction": (ENERGY, "size of the true interaction that power counts against"),
    "confidence": ("1", "level of the interval"),
    "energy_unit": _UNIT,
}

_NEEDS: Mapping[str, _Meaning] = {
    "subject": ("", "cycle, mutant whose charge is judged, or all for all of them at once"),
    "goal": ("", "what shall be reached"),
    "wanted": ("energy unit of the plan, or 1", "wanted half-width, power or probability of a verdict"),
    "further": _FURTHER,
    "further_low": ("1", "with luck: 1 in 10 of what the scatters may be needs no more"),
    "further_high": ("1", "to be sure: 9 in 10 need no more; empty for more than 1000"),
    "expected": ("energy unit of the plan, or 1", "half-width or probability then; of all, the worst"),
    "shares": _SHARES,
    "reason": ("", "why no number of cells does, or what was left out"),
}

_SPLIT: Mapping[str, _Meaning] = {
    "construct": _CONSTRUCT,
    "kind": ("", "kind of cell"),
    "cells_now": ("1", "cells there are"),
    "further": ("1", "further cells in the best split"),
    "further_equal_split": ("1", "further cells if every kind gets the same number"),
    "cycles": ("1", "cycles that the cells count for"),
}


@dataclass(frozen=True, kw_only=True, slots=True)
class Column:
    """One column of a table that comes out."""

    name: str
    type: ColumnType
    words: tuple[str, ...]  # the few it may hold; empty where there is no such list
    needed: bool  # False where it may be empty
    unit: str  # `ENERGY` for that of the row, "1" for plain numbers, empty for words
    meaning: str

    @property
    def explained(self) -> str:
        """The meaning, and the words that it can be."""
        return f"{self.meaning}: {', '.join(self.words)}" if self.words else self.meaning


@dataclass(frozen=True, kw_only=True, slots=True)
class OutputTable:
    """One table that comes out, a CSV file."""

    title: str
    kind: type[Row]
    meanings: Mapping[str, _Meaning]

    @property
    def columns(self) -> tuple[Column, ...]:
        """Its columns in the order of the file."""
        hints = get_type_hints(self.kind)
        return tuple(
            _column(name, hints[field_of_column(name)], *self.meanings[name]) for name in self.kind.columns
        )


OUTPUT_TABLES: Mapping[str, OutputTable] = {
    name: OutputTable(title=title, kind=kind, meanings=meanings)
    for name, title, kind, meanings in (
        ("interactions", "a row a cycle, by order and then in residue order", InteractionRow, _INTERACTIONS),
        ("ranking", "a row a cycle that has an uncertainty, the strongest first", RankRow, _RANKING),
        (
            "backgrounds",
            "a row an interaction inside a cycle of higher order",
            BackgroundRow,
            _BACKGROUNDS,
        ),
        ("constructs", "a row a construct, the wild type first", ConstructRow, _CONSTRUCTS),
        ("cells", "a row a cell's curve", CellRow, _CELLS),
        (
            "midpoints",
            "a row a construct with curves; what the literature quotes",
            MidpointRow,
            _MIDPOINTS,
        ),
        ("budget", "a row a source of error of a cycle", BudgetRow, _BUDGET),
        ("next_steps", "a row an unresolved cycle: what would settle it", NextStepRow, _NEXT_STEPS),
        ("per_subunit", "a row a cycle of a protein of several subunits", SubunitRow, _PER_SUBUNIT),
        ("plan", "a row a cycle and number of cells: what to expect", OutlookRow, _PLAN),
        ("needs", "a row a goal: fewest further cells", NeedRow, _NEEDS),
        ("split", "a row a construct and kind of cell: the best split of further cells", SplitRow, _SPLIT),
    )
}


def _column(name: str, hint: Any, unit: str, meaning: str) -> Column:
    members = get_args(hint) if get_origin(hint) in (Union, types.UnionType) else (hint,)
    kinds = [one for one in members if one is not types.NoneType]
    words = tuple(word for kind in kinds if get_origin(kind) is Literal for word in get_args(kind))
    is_list = any(get_origin(kind) is tuple for kind in kinds)
    return Column(
        name=name,
        type="string" if words or is_list else _TYPES[kinds[0]],
        words=words,
        needed=len(kinds) == len(members) and not is_list,
        unit=unit,
        meaning=meaning,
    )
