"""Total gating charge per channel of one construct: every value there is, and the one that is used."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from .campaign import ChargeReplicate, Construct, OpeningCurve
from .errors import DataRefused, Problem, UsageError
from .flags import Flag
from .intervals import t_interval, welch_satterthwaite
from .limiting_slope import LimitingSlope, limiting_slope
from .mutations import joined
from .quantities import Quantity, Sample, Summary

# Published totals of voltage-gated channels run from 4 to 5 (a calcium-activated potassium channel) to 12 to
# 14 e0 (voltage-gated potassium channels), and about 4 e0 are lost with each neutralised sensor charge; the
# sources stand in tests/reference/gating_charge.json. Outside these a warning is due, not a refusal.
PLAUSIBLE_CHARGE_E0 = (3.0, 16.0)
PLAUSIBLE_LOSS_PER_MUTATION_E0 = 5.0

LIMITING_SLOPE = "limiting slope"

Kind = Literal["cells", "summary", "limiting slope"]


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargeValue:
    """Total charge per channel from one method."""

    method: str  # as the user names it; "measured" when not named
    kind: Kind
    quantity: Quantity  # e0
    citation: str | None = None
    lower_bound: bool = False  # a limiting slope whose open probability has not reached its limit

    @property
    def source(self) -> str:
        """Words for the `charge_source` column."""
        words = self.method if self.citation is None else f"{self.method}: {self.citation}"
        return f"{words} (lower bound)" if self.lower_bound else words


def _of_cells(method: str, replicates: Sequence[ChargeReplicate]) -> ChargeValue:
    ordered = sorted(replicates, key=lambda replicate: replicate.cell)
    lone = ordered[0].own_uncertainty_e0 if len(ordered) == 1 else None
    if lone is not None:  # one cell shows no scatter, but its channel count came with an uncertainty
        quantity: Quantity = Summary(mean=ordered[0].charge_e0, sem=lone, n=None)
    else:
        quantity = Sample(
            cells=tuple(replicate.cell for replicate in ordered),
            values=np.array([replicate.charge_e0 for replicate in ordered], dtype=float),
            batches=tuple(replicate.batch for replicate in ordered),
        )
    return ChargeValue(method=method, kind="cells", quantity=quantity)


def _slope(curve: OpeningCurve, temperature_c: float) -> LimitingSlope:
    try:
        return limiting_slope(curve.voltage_mv, curve.open_probability, temperature_c=temperature_c)
    except UsageError as error:
        problem = Problem(
            origin=curve.origin,
            found=f"open probabilities of {curve.construct}/{curve.cell} without a limiting slope: {error}",
            expected="an open probability that rises with voltage, above 0 at four voltages or more",
            remedy="correct the cell, or leave it out",
        )
        raise DataRefused([problem]) from error


def _of_openings(curves: Sequence[OpeningCurve], temperature_c: float) -> ChargeValue:
    """Limiting slopes of all cells; a lower bound as soon as one of them is no more than that."""
    ordered = sorted(curves, key=lambda curve: curve.cell)
    slopes = [_slope(curve, temperature_c) for curve in ordered]
    quantity = Sample(
        cells=tuple(curve.cell for curve in ordered),
        values=np.array([slope.charge_e0 for slope in slopes]),
        batches=tuple(curve.batch for curve in ordered),
    )
    bound = any(slope.is_lower_bound for slope in slopes)
    return ChargeValue(method=LIMITING_SLOPE, kind="limiting slope", quantity=quantity, lower_bound=bound)


def charge_values(construct: Construct, temperature_c: float) -> tuple[ChargeValue, ...]:
    """Every value of a construct's total charge, by method.

    Parameters
    ----------
    construct : Construct
        Its charges, cell by cell, summarised or from the literature, and its open probabilities.
    temperature_c : float
        Temperature (degrees Celsius); the limiting slope is kT d ln Po / dV.

    Returns
    -------
    tuple of ChargeValue
        Sorted by method; empty when nothing was measured.

    Raises
    ------
    DataRefused
        If open probabilities have no limiting slope.
    """
    methods: dict[str, list[ChargeReplicate]] = {}
    for replicate in construct.charge_replicates:
        methods.setdefault(replicate.method or "measured", []).append(replicate)
    values = [_of_cells(method, replicates) for method, replicates in methods.items()]
    for summary in construct.charge_summaries:
        quantity = Summary(mean=summary.charge_e0, sem=summary.sem_e0, n=summary.n)
        method = summary.method or ("literature" if summary.citation else "measured")
        values.append(
            ChargeValue(method=method, kind="summary", quantity=quantity, citation=summary.citation)
        )
    if construct.openings:
        values.append(_of_openings(construct.openings, temperature_c))
    return tuple(sorted(values, key=lambda value: (value.method, value.kind)))


def _weight(value: ChargeValue) -> tuple[bool, bool, int, str]:
    """Sort key: own cells before a bare limiting slope, a bound last, then by the number of cells."""
    return (value.lower_bound, value.kind == "limiting slope", -(value.quantity.n or 0), value.method)


def choose(values: Sequence[ChargeValue], preferred: str | None) -> ChargeValue | None:
    """Value that energies are formed with.

    Parameters
    ----------
    values : sequence of ChargeValue
        All there are of one construct.
    preferred : str or None
        Method to take where there is one: what the settings ask for, else the wild type's, since a ratio of
        charges from two methods compares the methods too.

    Returns
    -------
    ChargeValue or None
        Without the preferred method, a direct measurement before a limiting slope, then the one with most
        cells. None when there is no value.
    """
    if not values:
        return None
    of_method = [value for value in values if value.method == preferred]
    return min(of_method or values, key=_weight)


def _difference(a: Quantity, b: Quantity, confidence: float) -> tuple[float, float, float]:
    """Difference of two means with its Welch interval."""
    variances = [a.sem**2, b.sem**2]
    dof = welch_satterthwaite(variances, [a.dof, b.dof])
    low, high = t_interval(a.mean - b.mean, math.sqrt(math.fsum(variances)), dof, confidence)
    return a.mean - b.mean, low, high


def method_flags(
    construct: Construct, values: Sequence[ChargeValue], used: ChargeValue, confidence: float
) -> list[Flag]:
    """Flags of a construct whose methods disagree about its charge, or whose value is only a bound."""
    label, flags = construct.label, []
    for other in values:
        if other is used:
            continue
        difference, low, high = _difference(other.quantity, used.quantity, confidence)
        if low > 0 or high < 0:
            message = (
                f"two methods disagree about the total charge of {label}: {other.source} gives "
                f"{difference:+.2f} e0 ({low:.2f} to {high:.2f}) against {used.source}, which is used; find "
                "out why before trusting either"
            )
            flags.append(
                Flag(code="charge-methods-differ", subject=label, construct=label, message=message,
                     value=difference, limit=0.0)
            )  # fmt: skip
    if used.lower_bound:
        message = (
            f"the total charge of {label}, {used.quantity.mean:.3g} e0, is a lower bound: its open "
            "probability was not followed down to its limiting slope; go on to more negative voltages"
        )
        flags.append(
            Flag(code="charge-lower-bound", subject=label, construct=label, message=message,
                 value=used.quantity.mean)
        )  # fmt: skip
    return flags


def plausibility_flags(construct: Construct, charge_e0: float, wild_type_e0: float | None) -> list[Flag]:
    """Flag of a total charge, or of a loss of it, beyond what voltage-gated channels are known for."""
    label, (least, most) = construct.label, PLAUSIBLE_CHARGE_E0
    doubts: list[tuple[str, float, float]] = []
    if not least <= charge_e0 <= most:
        words = f"its total charge of {charge_e0:.3g} e0 lies outside {least:g} to {most:g} e0"
        doubts.append((words, charge_e0, most if charge_e0 > most else least))
    if wild_type_e0 is not None and construct.mutations:
        allowed = PLAUSIBLE_LOSS_PER_MUTATION_E0 * len(construct.mutations)
        loss = wild_type_e0 - charge_e0
        if loss > allowed:
            which = joined(construct.mutations)
            words = f"it lost {loss:.3g} e0 of charge with {which}, more than {allowed:g} e0"
            doubts.append((words, loss, allowed))
    return [
        Flag(
            code="charge-implausible", subject=label, construct=label, value=value, limit=limit,
            message=f"{label}: {words}, beyond what is published for voltage-gated channels; check the "
            "channel count and the unit",
        )
        for words, value, limit in doubts
    ]  # fmt: skip
