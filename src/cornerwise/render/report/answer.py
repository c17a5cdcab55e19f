"""The answer first: which pairs, how sure, what not to trust."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ...flags import FLAG_CODES
from ...result import InteractionRow, Result
from ..legend import percent
from ..methods import counted
from ..rounding import typeset
from .views import CycleView

_MOST = 12  # cycles named in one line

_VERDICT_TITLES = {
    "coupled": "Coupled: the whole interval lies beyond {threshold} on one side of 0",
    "detected": "Detected: an interaction, but not shown to be stronger than {threshold}",
    "unresolved": "Unresolved: the data say neither that there is an interaction nor that there is none",
    "uncoupled": "Uncoupled: shown to be weaker than {threshold}",
}
_WHAT_FLAGS_SAY = {
    "unsaturated-low": "curves do not level off at the low end",
    "unsaturated-high": "curves do not level off at the high end",
    "sloping-plateau": "a plateau slopes",
    "not-monotonic": "a curve falls where it should rise",
    "coarse-steps": "voltage steps are coarse for the steepness",
    "noisy": "curves are noisy",
    "area-disagrees": "the plain area under the curve gives another median",
    "midpoint-misleads": "midpoints would give another energy than medians",
    "few-cells": "a construct rests on few cells",
    "single-batch": "all cells come from one batch",
    "charge-shift": "a mutant's total charge changed",
    "charge-nonadditive": "charges do not add up: the energy depends on the voltage",
    "charge-assumed": "a total charge was never measured",
    "charge-methods-differ": "methods for total charge disagree",
    "charge-lower-bound": "a total charge is only a lower bound",
    "charge-implausible": "a total charge is implausible",
    "mixed-ranges": "corners were recorded over different voltages",
    "mixed-protocol": "corners were recorded with different protocols",
    "outlying-cell": "a cell lies far from the others",
}


@dataclass(frozen=True, kw_only=True, slots=True)
class Group:
    """Cycles that share a verdict or a doubt."""

    key: str
    title: str
    shown: tuple[CycleView, ...]
    more: int  # that are not shown


@dataclass(frozen=True, kw_only=True, slots=True)
class Answer:
    """The first screen of the report."""

    headline: str
    verdicts: tuple[Group, ...]
    sureness: tuple[str, ...]
    doubts: tuple[Group, ...]
    clean: Group  # coupled or detected without any doubt


def _group(key: str, title: str, cycles: Sequence[CycleView]) -> Group:
    return Group(key=key, title=title, shown=tuple(cycles[:_MOST]), more=max(0, len(cycles) - _MOST))


def answer(result: Result, cycles: Sequence[CycleView]) -> Answer:
    """Sort the cycles into what is known, how surely, and what is doubtful.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    cycles : sequence of CycleView
        Strongest first.
    """
    threshold = f"{result.settings.energy_threshold:.3g} {result.settings.energy_unit}"
    verdicts = []
    for verdict, title in _VERDICT_TITLES.items():
        members = [one for one in cycles if one.row.interaction_verdict == verdict]
        if members:
            verdicts.append(_group(verdict, title.format(threshold=threshold), members))
    found = [one for one in cycles if one.row.interaction_verdict in ("coupled", "detected")]
    return Answer(
        headline=_headline(cycles, threshold),
        verdicts=tuple(verdicts),
        sureness=tuple(_sureness(result, cycles)),
        doubts=tuple(_doubts(cycles)),
        clean=_group("clean", "", [one for one in found if not one.row.flags]),
    )


def _headline(cycles: Sequence[CycleView], threshold: str) -> str:
    if not cycles:
        return "No cycle is complete, so there is no interaction energy to give."
    coupled = sum(one.row.interaction_verdict == "coupled" for one in cycles)
    detected = sum(one.row.interaction_verdict == "detected" for one in cycles)
    kinds = "cycle" if any(one.row.order != 2 for one in cycles) else "pair"
    if len(cycles) == 1:
        return _headline_of_one(cycles[0].row, kinds, threshold)
    found = "None" if not coupled else str(coupled)
    verb = "are" if coupled > 1 else "is"
    text = f"{found} of {counted(len(cycles), kinds)} {verb} coupled by more than {threshold}"
    if not detected:
        return f"{text}."
    return f"{text}; {detected} more {'is' if detected == 1 else 'are'} detected."


def _headline_of_one(row: InteractionRow, kind: str, threshold: str) -> str:
    said = {
        "coupled": f"is coupled by more than {threshold}",
        "detected": f"interacts, but is not shown to be coupled by more than {threshold}",
        "uncoupled": f"is shown not to be coupled by more than {threshold}",
        "unresolved": "is unresolved: the data show neither an interaction nor that there is none",
    }
    return f"The only {kind}, {row.cycle}, {said[row.interaction_verdict]}."


def _sureness(result: Result, cycles: Sequence[CycleView]) -> list[str]:
    level = percent(result.settings.confidence)
    adjusted = f"; p values are adjusted for {counted(len(cycles), 'cycle')}" if len(cycles) > 1 else ""
    sentences = [
        f"Every interval is a {level} interval for that cycle alone, from the scatter of cells and from all "
        f"stated uncertainties{adjusted}."
    ]
    unused = [row.construct for row in result.constructs if row.charge_verdict not in (None, "assumed")]
    if unused and result.settings.charge != "measured":
        sentences.append(
            "One total charge serves every construct. The charges that were measured of "
            f"{counted(len(unused), 'mutant')} enter no energy; they decide on charge verdicts and the "
            "shortcut."
        )
    untested = sum(any(one.verdict == "assumed" for one in view.row.corner_charges) for view in cycles)
    if untested:
        sentences.append(
            f"{untested} of {counted(len(cycles), 'cycle')} {'rests' if untested == 1 else 'rest'} on total "
            "charges that were not measured: that they may differ from the wild type's is no part of the "
            "interval; each cycle's section says what difference would undo its verdict."
        )
    strongest = next((one for one in cycles if one.row.rank == 1), None)
    if strongest is not None and len(cycles) > 1:
        row = strongest.row
        place = (
            ", and every other is shown to be weaker"
            if row.rank_high == 1
            else f", but the data allow it any rank from {row.rank_low} to {row.rank_high}"
        )
        sentences.append(f"{row.cycle} is ranked first{place}.")
    alone = [one.row.cycle for one in cycles if _excludes_0(one.row) and one.row.favours is None]
    if alone:
        named = ", ".join(alone[:_MOST]) + (f" and {len(alone) - _MOST} more" if len(alone) > _MOST else "")
        sentences.append(
            f"Taken alone, the data of {named} exclude 0, but among so many cycles that may be chance: "
            f"adjusted p above {1 - result.settings.confidence:.2g}."
        )
    return [typeset(sentence) for sentence in sentences]


def _excludes_0(row: InteractionRow) -> bool:
    return row.low is not None and row.high is not None and (row.low > 0 or row.high < 0)


def _doubts(cycles: Sequence[CycleView]) -> list[Group]:
    """What not to trust: shortcuts that are wrong or untested, then every flag with the cycles it touches."""
    invalid = [one for one in cycles if one.row.shortcut_verdict == "invalid"]
    groups = []
    if invalid:
        title = "Median voltages alone give a wrong energy; only the full energy counts"
        groups.append(_group("shortcut invalid", title, invalid))
    for code in FLAG_CODES:
        touched = [one for one in cycles if code in one.row.flags]
        if touched:
            groups.append(_group(code, _WHAT_FLAGS_SAY.get(code, code), touched))
    return groups
