"""One cycle in words: what was measured, what was assumed, why these verdicts, what would change them."""

from __future__ import annotations

from collections.abc import Iterable

from ..campaign import Settings, StatedCharge
from ..mutations import name_of_cycle
from ..result import BudgetRow, ConstructRow, CornerCharge, InteractionRow, Result
from ..units import in_percent
from .legend import distance_words, percent
from .planning import shares_words
from .rounding import decimals_for, freedom_words, number, span, with_uncertainty

_STATED, _WILD_TYPES = "stated", "wild type"  # sources of charge, as the table of constructs names them


def explain(result: Result, cycle: str) -> str:
    """Explain one cycle of a result in plain sentences.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    cycle : str
        Name of the cycle, as in the coupling table, or its mutations in any order.

    Returns
    -------
    str
        Paragraphs separated by blank lines, each on one line.

    Raises
    ------
    UsageError
        If there is no cycle of that name; names the nearest.
    """
    rows = {row.cycle: row for row in result.interactions}
    row = rows[name_of_cycle(cycle, {name: one.mutations for name, one in rows.items()})]
    corners = [one for label, _ in row.corners for one in result.constructs if one.construct == label]
    budget = [part for part in result.budget if part.cycle == row.cycle]
    paragraphs = [
        _interaction(result, row),
        _measured(row, corners),
        _assumed(result, row, corners),
        _shortcut(result, row),
        _voltages(result, row),
        _native_pair(row),
        _outlook(result, row, budget),
    ]
    return "\n\n".join(paragraph for paragraph in paragraphs if paragraph)


def _energy(result: Result, value: float | None, uncertainty: float | None) -> str:
    return f"{with_uncertainty(value, uncertainty)} {result.settings.energy_unit}"


_VERDICT_REASONS = {
    "coupled": "the whole interval lies beyond the threshold of {threshold}",
    "detected": "the interval excludes 0 but not the threshold of {threshold}",
    "detected, weak": "the interval excludes 0 and lies inside the threshold of {threshold}: an "
    "interaction, "
    "and shown to be a weaker one",
    "uncoupled": "the whole interval lies inside the threshold of {threshold} either side of 0",
    "unresolved": "the interval neither excludes 0 nor lies inside the threshold of {threshold}",
}


def _interaction(result: Result, row: InteractionRow) -> str:
    settings = result.settings
    formula = " ".join(f"{'+' if sign > 0 else '-'} dG({label})" for label, sign in row.corners)
    text = (
        f"{row.cycle}: I = {formula} = {_energy(result, row.interaction, row.std_uncertainty)} per channel"
        f" at {settings.reference_voltage_mv:g} mV."
    )
    if row.low is None or row.dof is None:
        return f"{text} A corner rests on too few cells for an uncertainty, so it is unresolved."
    threshold = f"{settings.energy_threshold:.3g} {settings.energy_unit}"
    text += (
        f" The {percent(settings.confidence)} interval is {span((row.low, row.high), row.std_uncertainty)} "
        f"({_kind(settings, row.dof)}; p = {row.p_value:.2g}"
        f"{_adjusted(result, row)}). It is {row.interaction_verdict}: "
        f"{_reason(row, settings.energy_threshold, threshold)}."
    )
    if row.favours is not None:
        text += f" The native interaction favours the {row.favours} state; this is no proof of a contact."
    return text


def _kind(settings: Settings, dof: float) -> str:
    """How the interval and the p value beside it were formed."""
    if settings.interval == "monte-carlo":
        return f"Monte Carlo; by Student's t with {freedom_words(dof)}"
    return f"Student's t, {freedom_words(dof)}"


def _reason(row: InteractionRow, limit: float, threshold: str) -> str:
    beyond_0 = row.low is not None and row.high is not None and (row.low > 0 or row.high < 0)
    if row.interaction_verdict == "unresolved" and beyond_0:
        return "the interval excludes 0, but not once the p value is adjusted for the number of cycles"
    verdict: str = row.interaction_verdict
    if verdict == "detected" and row.low is not None and row.high is not None:
        weak = max(abs(row.low), abs(row.high)) < limit
        verdict = "detected, weak" if weak else verdict
    return _VERDICT_REASONS[verdict].format(threshold=threshold)


def _adjusted(result: Result, row: InteractionRow) -> str:
    count = len(result.interactions)
    return "" if count == 1 else f", {row.p_adjusted:.2g} after adjustment for {count} cycles"


def _not_measured(row: InteractionRow, one: ConstructRow) -> bool:
    """Whether a corner's charge comes from elsewhere: stated, or the wild type's."""
    lent = one.charge_source == _WILD_TYPES and one.construct != row.wild_type
    return lent or _is_stated(one)


def _is_stated(one: ConstructRow) -> bool:
    return one.charge_source is not None and one.charge_source.partition(":")[0] == _STATED


def _measured(row: InteractionRow, corners: list[ConstructRow]) -> str:
    parts = []
    measured = {one.construct for one in row.corner_charges if one.verdict != "assumed"}
    for one in corners:
        charge = "Q measured, but not used" if one.construct in measured else "Q not measured"
        if not _not_measured(row, one):
            n = "" if one.charge_n is None else f", n = {one.charge_n}"
            charge = f"Q {with_uncertainty(one.charge_e0, one.charge_sem_e0)} e0 ({one.charge_source}{n})"
        parts.append(
            f"{one.construct}: Vm {with_uncertainty(one.median_mv, one.median_uncertainty_mv)} mV (n = "
            f"{one.cells_used}), {charge}"
        )
    return f"Measured, mean ± standard uncertainty: {'; '.join(parts)}."


def _assumed(result: Result, row: InteractionRow, corners: list[ConstructRow]) -> str:
    lent = [one for one in corners if _not_measured(row, one)]
    if not lent:
        return "Nothing was assumed about total charge: it was measured on every corner."
    value = f"{with_uncertainty(lent[0].charge_e0, lent[0].charge_sem_e0)} e0"
    source = f"that of {row.wild_type}, {value}"
    if _is_stated(lent[0]):
        charge = result.settings.charge
        cited = charge.citation if isinstance(charge, StatedCharge) else None
        source = f"the stated {value}{f' ({cited})' if cited else ''}"
    if isinstance(result.settings.charge, StatedCharge) or result.settings.charge == "wild-type":
        text = f"Assumed: one total charge for all corners, as the settings ask, {source}."
    else:
        named = ", ".join(one.construct for one in lent)
        text = (
            f"Assumed: the total charge of {named} was not measured in this campaign and is taken to be "
            f"{source}."
        )
    text += " That the constructs may differ in it is no part of the interval."
    return f"{text} {_breakdown(result, row)}"


def _breakdown(result: Result, row: InteractionRow) -> str:
    """What change of an assumed charge would undo the verdict, and what would erase the interaction."""
    if row.interaction_verdict != "unresolved" and not row.breakdown:
        return "The charges that were measured are judged below."
    if row.interaction_verdict == "unresolved":
        return "As the interaction is unresolved, no change of a charge is needed to put it in doubt."
    threshold = f"{result.settings.energy_threshold:.3g} {result.settings.energy_unit}"
    ends = {
        "coupled": f"no longer be called coupled, its interval reaching {threshold},",
        "detected": "no longer be detected, its interval reaching 0,",
        "uncoupled": f"no longer be shown to be weaker than {threshold}",
    }[row.interaction_verdict]
    text = (
        f"The interaction would {ends} if the charge of one of them differed from that by so much: "
        f"{_changes((one.construct, one.verdict_fraction) for one in row.breakdown)}."
    )
    if row.interaction_verdict == "coupled":
        to_zero = [(one.construct, one.fraction) for one in row.breakdown if one.fraction is not None]
        text += f" The interval would reach 0 at {_changes(to_zero)}."
    return f"{text} Judge whether such a change is plausible."


def _changes(fractions: Iterable[tuple[str, float]]) -> str:
    return ", ".join(
        f"{construct} {in_percent(fraction, 0 if abs(fraction) > 0.1 else 1, signed=True)}"
        for construct, fraction in fractions
    )


def _charge_sentence(one: CornerCharge, confidence: float) -> str:
    if one.ratio is None or one.low is None:
        return f"{one.construct} not measured"
    return (
        f"{one.construct} {one.ratio:.3f} ({percent(confidence)} interval {one.low:.3f} to "
        f"{one.high:.3f}), "
        f"{one.verdict}"
    )


_SHORTCUT_REASONS = {
    "valid": "every charge is shown to be equal within the margin and the bias is inside the tolerance",
    "invalid": "a charge changed, or the bias lies outside the tolerance",
    "unresolved": "not every charge could be shown to be equal",
    "untested": "it is right only if the charges that were not measured equal the wild type's",
}


def _shortcut(result: Result, row: InteractionRow) -> str:
    settings = result.settings
    charges = "; ".join(_charge_sentence(one, settings.confidence) for one in row.corner_charges)
    energy = f"{number(row.shortcut, decimals_for(row.std_uncertainty))} {settings.energy_unit}"
    if all(one.verdict == "assumed" for one in row.corner_charges):
        return (
            f"With one charge for all corners the energy is the shortcut, {energy} from median voltages "
            f"alone. The shortcut is {row.shortcut_verdict}: {_SHORTCUT_REASONS[row.shortcut_verdict]}."
        )
    text = (
        f"The shortcut, median voltages alone and one charge for all corners, gives {energy}. Charge "
        f"relative to {row.wild_type}, equal if within {percent(settings.charge_margin)}: {charges}."
    )
    if row.shortcut_bias is not None and row.shortcut_bias_low is not None:
        limits = (row.shortcut_bias_low, row.shortcut_bias_high)
        half = (row.shortcut_bias_high or 0.0) - row.shortcut_bias_low
        text += (
            f" {_one_charge(result)}he shortcut is off by "
            f"{number(row.shortcut_bias, decimals_for(half / 4))} "
            f"({span(limits, half / 4)}), the tolerance is {settings.energy_tolerance:.3g} "
            f"{settings.energy_unit}."
        )
    all_equal = all(one.verdict == "equal" for one in row.corner_charges)
    reason = _SHORTCUT_REASONS[row.shortcut_verdict]
    if row.shortcut_verdict == "unresolved" and all_equal:
        reason = "every charge is equal within the margin, but a bias inside the tolerance could not be shown"
    return f"{text} The shortcut is {row.shortcut_verdict}: {reason}."


def _one_charge(result: Result) -> str:
    """Begins a sentence on measured charges, which the energies themselves may not use."""
    used = result.settings.charge == "measured"
    return "T" if used else "By the charges that were measured, which the energies do not use, t"


def _voltages(result: Result, row: InteractionRow) -> str:
    if row.change_per_10_mv is None or row.charge_interaction_low is None:
        return ""
    j = (
        f"J = {row.charge_interaction_e0:+.2f} e0 ({row.charge_interaction_low:.2f} to "
        f"{row.charge_interaction_high:.2f})"
    )
    unit, limits = result.settings.energy_unit, (row.change_per_10_mv_low, row.change_per_10_mv_high)
    half = ((limits[1] or 0.0) - (limits[0] or 0.0)) / 4
    value = number(row.change_per_10_mv, decimals_for(half))
    change = f"{value} {unit} ({span(limits, half)}) for every +10 mV"
    offset = (
        f"; the stated voltage offset of {result.settings.voltage_offset_mv:g} mV contributes "
        f"{row.offset_contribution:.2g} {unit}"
        if result.settings.voltage_offset_mv and row.offset_contribution is not None
        else ""
    )
    if result.settings.charge != "measured":
        return (
            "With one charge for all corners the interaction energy is one number for all voltages. "
            "The charges "
            f"that were measured give {j}, which would change it by {change}{offset}."
        )
    if "charge-nonadditive" in row.flags:
        return (
            f"The charges do not add up, {j}: the interaction energy depends on the voltage and changes by "
            f"{change}, and a common voltage error does not cancel{offset}."
        )
    return (
        f"The charges add up within their uncertainty, {j}: if they do so exactly the interaction "
        "energy is "
        "one number for all voltages and a common voltage error cancels; the data allow a change of "
        f"{change}"
        f"{offset}."
    )


def _native_pair(row: InteractionRow) -> str:
    """The native residues in a structure, where their distance is known."""
    if row.distance_angstrom is None:
        return ""
    charges = f" They carry {row.opposite_charges}." if row.opposite_charges else ""
    return (
        f"Distance of the native side chains: {distance_words(row)} ({row.distance_source}: "
        f"{row.distance_definition}).{charges} A structure shows one state and the energy is a difference "
        "between two: neither proves that the two residues touch, nor both together."
    )


def _next_recording(result: Result, row: InteractionRow) -> list[str]:
    """What more cells would do for an unresolved interaction."""
    step = next((one for one in result.next_steps if one.cycle == row.cycle), None)
    if step is None:
        return []
    if step.limit is not None:
        return [f"no number of cells settles it, held back by {step.limit}: {step.remedy}"]
    if step.further is None:
        return ["far more cells than can be recorded would be needed to settle it"]
    return [
        f"about {step.further} further cells ({shares_words(step.shares)}) would settle it as "
        f"{step.settled_as}, if the estimate and every scatter stay what they are"
    ]


def _still_valid(result: Result, row: InteractionRow) -> list[str]:
    """How strict the criteria may be for a shortcut that is valid to stay so."""
    if row.shortcut_verdict != "valid" or row.passing_margin is None:
        return []
    return [
        f"the shortcut stays valid down to a margin of {percent(round(row.passing_margin, 3))} and a "
        f"tolerance of {row.passing_tolerance:.2g} {result.settings.energy_unit}"
    ]


def _how_far(result: Result, row: InteractionRow) -> str:
    """How far charges and bias are from what a valid shortcut takes; no advice to move the criteria."""
    settings, margin = result.settings, row.passing_margin
    if row.shortcut_verdict == "valid":
        return ""
    parts = []
    if margin is not None and margin > settings.charge_margin and row.shortcut_verdict != "untested":
        parts.append(
            f"the intervals of the charges reach {percent(round(margin, 3))} from equality (the margin is "
            f"{percent(settings.charge_margin)})"
        )
    if row.passing_tolerance is not None:
        parts.append(
            f"the interval of the bias reaches {row.passing_tolerance:.2g} {settings.energy_unit} (the "
            f"tolerance is {settings.energy_tolerance:.3g})"
        )
    said = ", ".join(parts)
    return (
        f" How far the shortcut is from valid: {said}; limits are to be chosen before looking."
        if said
        else ""
    )


def _more_charges(result: Result, row: InteractionRow) -> list[str]:
    """Charge values that would give every charge a verdict, as far as that is known."""
    if row.shortcut_verdict == "untested":
        return ["measuring the assumed charges would test the shortcut"]
    own = result.settings.charge == "measured"  # else the counts are those of the shared charge
    counts = {one.construct: one.charge_n if own else None for one in result.constructs}
    wild_type = counts[row.wild_type]
    parts = []
    for one in row.corner_charges:
        there, needed = counts[one.construct], one.cells_needed
        if one.verdict != "unresolved" or needed is None:
            continue
        known = there is not None and wild_type is not None
        if known and needed <= min(there or 0, wild_type or 0):  # open for another reason than their number
            continue
        now = f" (there are {there} and {wild_type})" if known else ""
        parts.append(
            f"{needed} charge values each on {one.construct} and {row.wild_type}{now} would give that charge "
            "a verdict, if ratio and scatter stay what they are"
        )
    return parts


def _outlook(result: Result, row: InteractionRow, budget: list[BudgetRow]) -> str:
    parts = [*_next_recording(result, row), *_still_valid(result, row), *_more_charges(result, row)]
    known = [part for part in budget if part.share is not None]
    if known:
        most = known[0]
        parts.append(
            f"the largest part of the squared uncertainty, {in_percent(most.share or 0.0)}, comes from "
            f"{most.source}"
        )
    change = f"What would change it: {'; '.join(parts)}." if parts else ""
    return f"{change}{_how_far(result, row)}".strip()
