"""Judgement, apart from arithmetic: intervals in, words out."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from .intervals import Interval

ChargeVerdict = Literal["equal", "changed", "unresolved", "assumed"]
ShortcutVerdict = Literal["valid", "invalid", "unresolved", "untested"]
InteractionVerdict = Literal["coupled", "detected", "uncoupled", "unresolved"]
Favours = Literal["resting", "activated"]


def charge_verdict(equivalence: Interval, difference: Interval, margin: float) -> ChargeVerdict:
    """Judge a mutant's total charge against the wild type's.

    Parameters
    ----------
    equivalence : Interval
        Interval of the ratio at the level of two one-sided tests (90 % where intervals are 95 %).
    difference : Interval
        Interval of the ratio at the campaign's confidence.
    margin : float
        Fraction by which the ratio may differ from 1.

    Returns
    -------
    {"equal", "changed", "unresolved"}
        Equality has to be shown: an interval that merely includes 1 is ``unresolved``.
    """
    if equivalence.inside(1 - margin, 1 + margin):
        return "equal"
    return "changed" if difference.excludes(1.0) else "unresolved"


def shortcut_verdict(corners: Sequence[ChargeVerdict], bias: Interval, tolerance: float) -> ShortcutVerdict:
    """Judge whether medians alone would have given the interaction.

    Parameters
    ----------
    corners : sequence of {"equal", "changed", "unresolved", "assumed"}
        Charge verdicts of the mutants of the cycle.
    bias : Interval
        Interval of the shortcut's bias; NaN limits when it cannot be formed.
    tolerance : float
        Largest bias that is acceptable, same unit.
    """
    if "changed" in corners or bias.outside(-tolerance, tolerance):
        return "invalid"
    if "assumed" in corners:
        return "untested"
    shown_equal = all(verdict == "equal" for verdict in corners)
    if shown_equal and bias.inside(-tolerance, tolerance):
        return "valid"
    return "unresolved"


def interaction_verdict(interval: Interval, threshold: float, *, established: bool) -> InteractionVerdict:
    """Judge an interaction energy.

    Parameters
    ----------
    interval : Interval
        Of the energy, at the campaign's confidence.
    threshold : float
        Size it must exceed to be called coupled, same unit.
    established : bool
        Whether the p value adjusted for the number of cycles is at most 1 - confidence: `coupled` and
        `detected` need it, so that looking at many pairs does not make some of them couple by chance.
    """
    if established and interval.outside(-threshold, threshold):
        return "coupled"
    if established and interval.excludes(0.0):
        return "detected"
    return "uncoupled" if interval.inside(-threshold, threshold) else "unresolved"


def favours(interaction: float, interval: Interval, order: int, *, established: bool) -> Favours | None:
    """State the native interaction favours; None while its sign is not known.

    Parameters
    ----------
    interaction : float
        Interaction energy of the cycle, any unit.
    interval : Interval
        Its interval, same unit.
    order : int
        Number of mutations of the cycle.
    established : bool
        As for `interaction_verdict`.

    Notes
    -----
    The energy e that the native residues' joint interaction adds to the wild type's activation free
    energy enters the cycle with the wild type's sign: I = (-1)**order e. A positive e favours the resting
    state. It is a difference between two states, never a contact.
    """
    if not (established and interval.excludes(0.0)):
        return None
    return "resting" if interaction * (-1) ** order > 0 else "activated"
