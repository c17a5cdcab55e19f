"""The sentences that go with every table and figure: formula, sign, unit, settings."""

from __future__ import annotations

from collections.abc import Iterable

from ..campaign import Settings, StatedCharge
from ..result import BudgetRow, InteractionRow, RankRow, Result
from ..units import in_percent

SIGN_OF_PAIR = (
    "I > 0: the native pair's interaction favours the resting state over the activated one; "
    "I < 0: the activated one"
)
SIGN_OF_ODD = (
    "I > 0: the native residues' joint interaction favours the activated state; I < 0: the resting one"
)
SIGN_OF_ODD_ORDER = "orders 3, 5, ...: the wild type enters with a minus sign, so read the two the other way"
_CYCLES_TOLD = 3

CAUTION = "a coupling energy is a difference between two states and no proof of a contact"


def formula(reference_mv: float = 0.0) -> str:
    """Formula of the interaction energy at a reference voltage (mV)."""
    energy = "F Q Vm" if reference_mv == 0 else "F Q (Vm - V)"
    at = "" if reference_mv == 0 else f", V = {reference_mv:g} mV"
    return f"I = sum over the corners of s {energy}; s = (-1)^(order - mutations in the corner){at}"


def sign_sentences(orders: set[int]) -> list[str]:
    """What the sign of I means for cycles of these orders."""
    odd = [SIGN_OF_ODD_ORDER] if any(order % 2 for order in orders) else []
    return [SIGN_OF_PAIR, *odd]


def formula_and_sign(orders: Iterable[int], reference_mv: float = 0.0) -> list[str]:
    """Formula at a reference voltage (mV) and meaning of the sign for a figure of cycles of these orders."""
    found = set(orders)
    only_odd = bool(found) and all(order % 2 for order in found)
    signs = [SIGN_OF_ODD] if only_odd else sign_sentences(found)
    kept_together = [
        sign.replace("I > 0", "I\u00a0>\u00a00").replace("I < 0", "I\u00a0<\u00a00") for sign in signs
    ]
    return [f"{formula(reference_mv)}.", *(f"{sign}." for sign in kept_together)]


def unit_phrase(settings: Settings) -> str:
    """Unit of energies with the reminder that it is per channel."""
    return f"{settings.energy_unit} per channel"


def distance_words(row: InteractionRow | RankRow) -> str:
    """Distance of a pair's side chains, and which atoms they are; nothing where it is not known."""
    if row.distance_angstrom is None:
        return ""
    within, across = row.distance_within_chain_angstrom, row.distance_across_chains_angstrom
    parts = [f"{row.distance_angstrom:.1f} Å"]
    if row.distance_atoms is not None:
        parts.append(f", {row.distance_atoms}")
    if within is not None and across is not None:
        farther, where = (across, "between chains") if within <= across else (within, "within one chain")
        parts.append(f"; {farther:.1f} Å {where}")
    if row.charged_distance_angstrom is not None:
        parts.append(f"; charged atoms {row.charged_distance_angstrom:.1f} Å")
    return "".join(parts)


def distance_sources(rows: Iterable[InteractionRow | RankRow]) -> list[str]:
    """What the distances are and where they come from, a sentence each."""
    known = [row for row in rows if row.distance_angstrom is not None]
    told = dict.fromkeys((row.distance_source, row.distance_definition) for row in known)
    return [f"distances from {source}: {definition}" for source, definition in told if source]


def percent(fraction: float) -> str:
    """Fraction as a percentage without needless decimals."""
    return f"{100 * fraction:.10g} %"


def interval_words(settings: Settings) -> str:
    """Level of the headline interval, and its kind where that is not the usual one."""
    kind = " Monte Carlo" if settings.interval == "monte-carlo" else ""
    return f"{percent(settings.confidence)}{kind} interval"


def budget_sentence(result: Result) -> list[str]:
    """Largest part of the uncertainty of the strongest cycles; nothing where there is no uncertainty."""
    largest: dict[str, BudgetRow] = {}
    for part in result.budget:  # the largest of each cycle comes first
        if part.share is not None:
            largest.setdefault(part.cycle, part)
    parts = [largest[row.cycle] for row in result.ranking if row.cycle in largest]
    if not parts:
        return []
    told = "; ".join(
        f"{part.cycle} {in_percent(part.share or 0.0)} {part.source}" for part in parts[:_CYCLES_TOLD]
    )
    rest = "; the other cycles' in budget.csv" if len(parts) > _CYCLES_TOLD else ""
    return [f"largest part of the squared uncertainty: {told}{rest}"]


def _charge_words(settings: Settings) -> str:
    if isinstance(settings.charge, StatedCharge):
        cited = "" if settings.charge.citation is None else f', citation = "{settings.charge.citation}"'
        return f"{{ value_e0 = {settings.charge.value_e0:g}, sem_e0 = {settings.charge.sem_e0:g}{cited} }}"
    return f'"{settings.charge}"'


def setting_values(settings: Settings) -> dict[str, str]:
    """Every key of ``campaign.toml`` with the value in force, as it would be written there."""
    return {
        "title": f'"{settings.title}"',
        "wild_type": f'"{settings.wild_type}"',
        "temperature_C": f"{settings.temperature_c:g}",
        "subunits": str(settings.subunits),
        "energy_unit": f'"{settings.energy_unit}"',
        "confidence": f"{settings.confidence:g}",
        "replicates": str(settings.replicates),
        "seed": str(settings.seed),
        "threshold": f"{settings.energy_threshold:.4g}",
        "shortcut_tolerance": f"{settings.energy_tolerance:.4g}",
        "charge_margin": f"{settings.charge_margin:g}",
        "voltage_offset_mV": f"{settings.voltage_offset_mv:g}",
        "reference_voltage_mV": f"{settings.reference_voltage_mv:g}",
        "correct_sloping_plateaus": "true" if settings.correct_sloping_plateaus else "false",
        "charge": _charge_words(settings),
        "charge_method": "the wild type's"
        if settings.charge_method is None
        else f'"{settings.charge_method}"',
        "interval": f'"{settings.interval}"',
        "adjustment": f'"{settings.adjustment}"',
        "simultaneous": "true" if settings.simultaneous else "false",
        "rank_by": f'"{settings.rank_by}"',
        "first": str(settings.first),
    }


def settings_sentences(settings: Settings) -> list[str]:
    """Two lines: what the user set, and what was left to its default."""
    values = setting_values(settings)
    stated = [f"{key} = {value}" for key, value in values.items() if key not in settings.defaulted]
    default = [f"{key} = {values[key]}" for key in values if key in settings.defaulted and key != "title"]
    sentences = [f"Set: {', '.join(stated)}"]
    return [*sentences, f"Defaults: {', '.join(default)}"] if default else sentences
