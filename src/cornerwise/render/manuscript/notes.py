"""Footnotes of the tables: formula, sign, unit, counts, intervals, verdicts, exclusions."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence

from ...campaign import Settings
from ...measurements import SET_ASIDE
from ...result import CellRow, Result
from ..legend import CAUTION, interval_words, percent, sign_sentences
from ..methods import ADJUSTMENTS, batch_sentence, charge_sentence, counted
from ..ordering import grouped
from ..rounding import MOST_FREEDOM
from .document import MISSING, Group, Note
from .words import Words, joined, words

_LISTED_CELLS = 4  # of one construct and reason; more are counted


def coupling_notes(result: Result, columns: Collection[str]) -> list[Note]:
    """Footnotes of the coupling table, those of its columns only.

    Parameters
    ----------
    result : Result
        In the unit of the table.
    columns : collection of str
        Keys of the columns that are shown.
    """
    settings = result.settings
    meanings = [_interaction(result), *_signs(result), words(f"{CAUTION[0].upper()}{CAUTION[1:]}.")]
    counts = {
        "interval": _interval(settings),
        "bootstrap": _bootstrap(settings),
        "simultaneous": words("Interval for all cycles: holds every cycle at once at that level."),
        "dof": _FREEDOM,
        "p_adjusted": _adjusted(result),
        "shrunken": words(
            "Shrunken *I*: less what chance is likely to have added to the strongest; takes four cycles."
        ),
        "rank": words("Rank by strength, with the ranks that the data allow."),
        "cells": words("*n*, cells behind the median voltage of a corner, fewest to most."),
        "batches": _batches(result),
    }
    verdicts = {
        "favours": _FAVOURS,
        "verdict": _verdict(settings),
        "shortcut": words("From *V*~m~ alone: the same sum with the wild type's charge in every corner."),
        "shortcut_bias": words("Shortcut's error, with its interval: *I* less the energy from *V*~m~ alone."),
        "shortcut_verdict": _shortcut(settings),
        "charge_interaction": words(
            "*J* = Σ *s* *Q*, with its interval: where it is not 0, *I* depends on the voltage."
        ),
    }
    return _paragraphs(
        [*meanings, _unit(settings)], _of(columns, counts), _of(columns, verdicts), _common(result)
    )


def construct_notes(result: Result, columns: Collection[str]) -> list[Note]:
    """Footnotes of the construct table, those of its columns only.

    Parameters
    ----------
    result : Result
        In the unit of the table.
    columns : collection of str
        Keys of the columns that are shown.
    """
    settings = result.settings
    counts = {
        "interval": _interval(settings),
        "dof": _FREEDOM,
        "cells": words("*n*, cells behind the median voltage."),
        "charge_cells": words("*n*~Q~, values of total charge."),
        "batches": words("*N*, batches (donors, days) that the cells come from."),
        "midpoint": words("*V*~½~, voltage where the scaled curve is 0.5."),
    }
    verdicts = {
        "charge_ratio": words(
            "*Q*/*Q*~wt~, total charge relative to {label}, with its interval.",
            label=settings.wild_type,
        ),
        "charge_verdict": _charge_verdict(settings),
    }
    return _paragraphs(
        [_energy(settings), _unit(settings)], _of(columns, counts), _of(columns, verdicts), _common(result)
    )


def _of(columns: Collection[str], texts: Mapping[str, Words]) -> list[Words]:
    """Texts of the columns that are shown."""
    return [text for key, text in texts.items() if key in columns]


def _paragraphs(*several: Sequence[Words]) -> list[Note]:
    return [Note(mark="", text=joined(one)) for one in several if one]


def _voltage(settings: Settings) -> tuple[str, str]:
    """Voltage factor of an energy, and where it is taken."""
    voltage = settings.reference_voltage_mv
    if voltage == 0:
        return "*V*~m~", ""
    return "(*V*~m~ − *V*)", f" at *V* = {voltage:g} mV".replace("-", "−")


_SIGNS_OF_PAIRS = "*s* = +1 for the wild type and the double mutant, −1 for the single mutants"
_SIGNS_OF_ANY = (
    "*s* = +1 for corners that lack none or an even number of the cycle's mutations, −1 for the others"
)


def _interaction(result: Result) -> Words:
    factor, at = _voltage(result.settings)
    signs = _SIGNS_OF_PAIRS if all(row.order == 2 for row in result.interactions) else _SIGNS_OF_ANY
    return words(
        f"*I* = Σ *s* *F* *Q* {factor} over the corners of a cycle{at}, {signs}; *Q*, total gating charge "
        "per channel; *V*~m~, median voltage; *F*, Faraday constant; ± *u*, standard uncertainty."
    )


def _energy(settings: Settings) -> Words:
    factor, at = _voltage(settings)
    where = at or " at 0 mV"
    return words(
        f"Δ*G* = *F* *Q* {factor}, activation free energy{where}, negative where the activated state is "
        "favoured; *Q*, total gating charge per channel; *V*~m~, median voltage; *F*, Faraday constant; ±, "
        "standard uncertainty."
    )


def _signs(result: Result) -> list[Words]:
    sentences = sign_sentences({row.order for row in result.interactions})
    return [
        words(f"{one[0].upper()}{one[1:]}.".replace("I >", "*I* >").replace("I <", "*I* <"))
        for one in sentences
    ]


def _unit(settings: Settings) -> Words:
    text = f"Energies are in {settings.energy_unit} per channel"
    if settings.energy_unit == "kT":
        text += f" at {settings.temperature_c:g} °C".replace("-", "−")
    if settings.subunits > 1:
        text += f"; the channel has {settings.subunits} subunits and each carries the mutations"
    return words(f"{text}.")


def _interval(settings: Settings) -> Words:
    if settings.interval == "monte-carlo":
        how = "Monte Carlo propagation of Student's *t* distributions"
    else:
        how = "Student's *t* with Welch-Satterthwaite degrees of freedom on propagated uncertainty"
    return words(f"{interval_words(settings)}: {how}.")


def _bootstrap(settings: Settings) -> Words:
    return words(
        f"Bootstrap interval: {percent(settings.confidence)}, {settings.replicates} replicates over cells "
        "within constructs, percentiles expanded to the same degrees of freedom."
    )


def _adjusted(result: Result) -> Words:
    number = len(result.interactions)
    if number < 2:
        return words("*p*~adj~, two-sided; one cycle, so nothing was adjusted.")
    name, _ = ADJUSTMENTS[result.settings.adjustment]
    return words(f"*p*~adj~, two-sided *p* value adjusted for {counted(number, 'cycle')} by {name}.")


_FREEDOM = words(
    f"*ν*, Welch-Satterthwaite degrees of freedom; with more than {MOST_FREEDOM} Student's *t* is as good as "
    "normal."
)
_FAVOURS = words(
    "Favours: the state that the native residues' interaction favours, where its sign is established."
)


def _verdict(settings: Settings) -> Words:
    threshold = f"{settings.energy_threshold:.3g} {settings.energy_unit}"
    return words(
        f"Verdict: coupled, the whole interval lies beyond {threshold} on one side of 0; detected, it "
        f"excludes 0 (both only with *p*~adj~ of at most {1 - settings.confidence:.3g}); uncoupled, "
        f"neither of these and within ±{threshold}; unresolved, none of these."
    )


def _shortcut(settings: Settings) -> Words:
    tolerance = f"{settings.energy_tolerance:.3g} {settings.energy_unit}"
    return words(
        "Shortcut: whether median voltages alone, with one charge for all corners, would have given *I*: "
        f"valid, all charges shown equal within {percent(settings.charge_margin)} and the error within "
        f"{tolerance}; invalid, a charge changed or the error is larger; unresolved, neither shown; "
        "untested, a charge was never measured."
    )


def _charge_verdict(settings: Settings) -> Words:
    inner = percent(round(2 * settings.confidence - 1, 6))
    return words(
        f"Charge: equal, the {inner} interval of the ratio lies within 1 ± {settings.charge_margin:g}; "
        f"changed, it is not equal and the {percent(settings.confidence)} interval excludes 1; unresolved, "
        "neither; assumed, never measured."
    )


def _batches(result: Result) -> Words:
    return words(
        "*N*, batches (donors, days) that these cells come from. {rule}", rule=batch_sentence(result).strip()
    )


def _common(result: Result) -> list[Words]:
    """What holds for both tables: whose charge, in which background, what was set aside."""
    before, unit, after = charge_sentence(result).partition(" e0 per channel")
    charge = words(f"{{before}}{' *e*~0~ per channel' if unit else ''}{{after}}", before=before, after=after)
    notes = [charge]
    if result.background:
        notes.append(words("Background of every construct: {text}.", text="/".join(result.background)))
    if len(result.cells):
        notes.append(words("{text}", text=_excluded(result)))
    return notes


def dash_note(groups: Sequence[Group]) -> list[Note]:
    """What a dash means, where one stands in the table."""
    if not any(cell.text == MISSING for group in groups for row in group.rows for cell in row):
        return []
    return [Note(mark="", text=words(f"{MISSING}, does not apply or is not available."))]


def _excluded(result: Result) -> str:
    aside = [cell for cell in result.cells if not cell.used]
    if not aside:
        return "Every cell was used."
    groups = grouped(((cell.construct, _reason(cell)), cell.cell) for cell in aside)
    told = [f"{construct} {_cells(cells)} ({reason})" for (construct, reason), cells in groups.items()]
    were = "was" if len(aside) == 1 else "were"
    return f"{counted(len(aside), 'cell')} {were} not used: {'; '.join(told)}."


def _reason(cell: CellRow) -> str:
    return (cell.reason or "no reason stated").removeprefix(SET_ASIDE)


def _cells(cells: list[str]) -> str:
    if len(cells) > _LISTED_CELLS:
        return counted(len(cells), "cell")
    return ", ".join(cells)
