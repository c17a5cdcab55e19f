"""Whether a mutant's total charge equals the wild type's, and what would settle it."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from .batches import regroup
from .campaign import Settings
from .energies import EnergyBook
from .intervals import (
    Interval,
    ratio_interval,
    t_p_value,
    welch_satterthwaite,
)
from .ledger import Ledger
from .measurements import Measurement
from .quantities import Quantity
from .sources import Derived, log_ratio
from .verdicts import ChargeVerdict, charge_verdict

MOST_CELLS = 200
_FEWEST_CELLS = 3
_UNKNOWN = Interval(math.nan, math.nan)


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargeJudgement:
    """One mutant's total charge against the wild type's."""

    verdict: ChargeVerdict
    ratio: float = math.nan
    difference: Interval = _UNKNOWN  # of the ratio, at the campaign's confidence
    equivalence: Interval = _UNKNOWN  # of the ratio, at the level of two one-sided tests
    p_value: float = math.nan  # of the ratio against 1
    cells_needed: int | None = None  # charge values on each of the two for a verdict at the observed scatter

    @property
    def passing_margin(self) -> float:
        """Smallest margin within which the charge would count as equal."""
        return max(1 - self.equivalence.low, self.equivalence.high - 1)


ASSUMED = ChargeJudgement(verdict="assumed")


def _relative_scatter(charge: Quantity) -> float:
    """Standard deviation of one value as a fraction of the mean; NaN where it is not known."""
    return math.nan if charge.n is None else charge.sem * math.sqrt(charge.n) / charge.mean


def cells_for_verdict(
    ratio: float, scatters: tuple[float, float], margin: float, confidence: float
) -> int | None:
    """Fewest charge values on mutant and wild type each that give a verdict.

    Parameters
    ----------
    ratio : float
        Observed ratio of the charges, taken as the true one.
    scatters : (float, float)
        Standard deviations of one value as fractions of the mean, mutant and wild type.
    margin : float
        Fraction by which the ratio may differ from 1 and count as equal.
    confidence : float
        Level of the verdict ``changed``; ``equal`` uses two one-sided tests at 1 - confidence.

    Returns
    -------
    int or None
        At least 3; None where 200 would not do or a scatter is not known.
    """
    if any(math.isnan(scatter) for scatter in scatters):
        return None
    for n in range(_FEWEST_CELLS, MOST_CELLS + 1):
        variances = [scatter**2 / n for scatter in scatters]
        u, dof = math.sqrt(sum(variances)), welch_satterthwaite(variances, [n - 1.0, n - 1.0])
        equivalence = ratio_interval(ratio, u, dof, 2 * confidence - 1)
        difference = ratio_interval(ratio, u, dof, confidence)
        if charge_verdict(equivalence, difference, margin) != "unresolved":
            return n
    return None


def compared_charges(label: str, book: EnergyBook, wild_type: str) -> tuple[Derived, Ledger] | None:
    """Logarithm of a mutant's total charge over the wild type's, with the sources it is compared by.

    Parameters
    ----------
    label : str
        The mutant.
    book : EnergyBook
        Charges of the campaign as functions of the sources of error.
    wild_type : str
        Label of the wild type.

    Returns
    -------
    Derived, Ledger or None
        None where one of the two was never measured.
    """
    own, reference = book.energies[label].own_charge, book.energies[wild_type].own_charge
    if own is None or reference is None:
        return None
    ledger, _ = regroup(book.ledger, [(label, 1.0), (wild_type, -1.0)], book.shared_batches)
    return ledger.adjusted(log_ratio(own, reference)), ledger


def judge_charge(
    label: str, measured: Mapping[str, Measurement], book: EnergyBook, settings: Settings
) -> ChargeJudgement:
    """Judge one mutant's total charge against the wild type's.

    Parameters
    ----------
    label : str
        The mutant.
    measured : mapping of str to Measurement
        All constructs.
    book : EnergyBook
        Their charges as functions of the sources of error.
    settings : Settings
        Confidence and margin.

    Notes
    -----
    The interval is Student's t on the logarithm of the ratio with Welch-Satterthwaite degrees of freedom.
    For samples of 3 to 12 with scatters of 4 to 12 % it covers as Fieller's interval does (both 95 to 97 %
    at equal sizes, 93 % for 3 against 12), is always finite, and judges a ratio and its inverse alike.
    """
    compared = compared_charges(label, book, settings.wild_type)
    charge, wild_type = measured[label].charge_e0, measured[settings.wild_type].charge_e0
    if compared is None or charge is None or wild_type is None:
        return ASSUMED
    logarithm, ledger = compared
    spread = ledger.spread(logarithm)
    ratio, u = math.exp(logarithm.value), math.sqrt(spread.variance)
    difference = ratio_interval(ratio, u, spread.dof, settings.confidence)
    equivalence = ratio_interval(ratio, u, spread.dof, 2 * settings.confidence - 1)
    scatters = (_relative_scatter(charge), _relative_scatter(wild_type))
    return ChargeJudgement(
        verdict=charge_verdict(equivalence, difference, settings.charge_margin),
        ratio=ratio,
        difference=difference,
        equivalence=equivalence,
        p_value=t_p_value(logarithm.value, u, spread.dof),
        cells_needed=cells_for_verdict(ratio, scatters, settings.charge_margin, settings.confidence),
    )


def family_verdicts(corners: Sequence[ChargeJudgement], confidence: float) -> list[ChargeVerdict]:
    """Verdicts of the corners of one cycle with the error of the whole family held.

    Parameters
    ----------
    corners : sequence of ChargeJudgement
        The mutants of one cycle.
    confidence : float
        1 minus the probability that any corner of equal charge is called ``changed``.

    Returns
    -------
    list of {"equal", "changed", "unresolved", "assumed"}
        ``changed`` by Holm's step-down over the corners that were measured. ``equal`` needs no adjustment:
        a valid shortcut needs every corner to pass, so the intersection-union test keeps its level (Berger,
        Technometrics 24 (1982) 295-300, from memory).
    """
    measured = [i for i, one in enumerate(corners) if one.verdict != "assumed"]
    rejected = set()
    for step, i in enumerate(sorted(measured, key=lambda i: corners[i].p_value)):
        if not corners[i].p_value <= (1 - confidence) / (len(measured) - step):
            break
        rejected.add(i)
    return [
        "unresolved" if one.verdict == "changed" and i not in rejected else one.verdict
        for i, one in enumerate(corners)
    ]
