"""A methods paragraph and figure legends filled with a campaign's own numbers, ready to paste."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence

from ..campaign import StatedCharge
from ..intervals import Adjustment
from ..result import Result
from ..units import energy_per_e0_mv
from .legend import distance_sources, formula, percent, sign_sentences
from .rounding import with_uncertainty

# Bibliographic data are cited from memory: check them against the publisher's page before submission.
_REFERENCES = {
    "linked": "Wyman J (1964). Linked functions and reciprocal effects in hemoglobin: a second look. "
    "Adv Protein Chem 19, 223-286.",
    "cycle": "Carter PJ, Winter G, Wilkinson AJ, Fersht AR (1984). The use of double mutants to detect "
    "structural changes in the active site of the tyrosyl-tRNA synthetase (Bacillus stearothermophilus). "
    "Cell 38, 835-840.",
    "higher": "Horovitz A, Fersht AR (1990). Strategy for analysing the co-operativity of intramolecular "
    "interactions in peptides and proteins. J Mol Biol 214, 613-617.",
    "gum": "JCGM 100:2008. Evaluation of measurement data: guide to the expression of uncertainty in "
    "measurement.",
    "welch": "Welch BL (1947). The generalization of 'Student's' problem when several different population "
    "variances are involved. Biometrika 34, 28-35.",
    "satterthwaite": "Satterthwaite FE (1946). An approximate distribution of estimates of variance "
    "components. Biometrics Bull 2, 110-114.",
    "bootstrap": "Hesterberg TC (2015). What teachers should know about the bootstrap. Am Stat 69, 371-386.",
    "holm": "Holm S (1979). A simple sequentially rejective multiple test procedure. Scand J Stat 6, 65-70.",
    "discovery": "Benjamini Y, Hochberg Y (1995). Controlling the false discovery rate: a practical and "
    "powerful approach to multiple testing. J R Stat Soc B 57, 289-300.",
    "monte carlo": "JCGM 101:2008. Supplement 1 to the guide to the expression of uncertainty in "
    "measurement: propagation of distributions using a Monte Carlo method.",
    "equivalence": "Schuirmann DJ (1987). A comparison of the two one-sided tests procedure and the power "
    "approach for assessing the equivalence of average bioavailability. J Pharmacokinet Biopharm 15, "
    "657-680.",
}


class _Cited:
    """Numbers references in the order of their use."""

    def __init__(self) -> None:
        self.keys: list[str] = []

    def __call__(self, *keys: str) -> str:
        for key in keys:
            if key not in self.keys:
                self.keys.append(key)
        return f"[{', '.join(str(self.keys.index(key) + 1) for key in keys)}]"


def methods_paragraphs(result: Result) -> tuple[list[str], list[str]]:
    """What was done, for the methods section, and the references it cites.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.

    Returns
    -------
    paragraphs : list of str
        Plain sentences with the numbers and settings of this campaign.
    references : list of str
        Numbered as in the paragraphs, from 1.
    """
    cited = _Cited()
    paragraphs = [
        _data(result, cited),
        _energies(result, cited),
        _uncertainty(result, cited),
        _judgement(result, cited),
        _outcome(result),
        *_distances(result),
    ]
    return paragraphs, [_REFERENCES[key] for key in cited.keys]


def methods_text(result: Result) -> str:
    """Methods paragraphs and their references as plain text."""
    paragraphs, references = methods_paragraphs(result)
    numbered = [f"[{number}] {text}" for number, text in enumerate(references, start=1)]
    return "\n\n".join([*paragraphs, "\n".join(numbered)]) + "\n"


def _between(numbers: Sequence[int]) -> str:
    low, high = min(numbers), max(numbers)
    return str(low) if low == high else f"{low} to {high}"


def counted(number: int, thing: str) -> str:
    """Number and thing, in the plural unless there is one."""
    return f"{number} {thing}{'' if number == 1 else 's'}"


def _data(result: Result, cited: _Cited) -> str:
    with_cells = {cell.construct for cell in result.cells}
    sentences = []
    if with_cells:
        numbers = [row.cells_used for row in result.constructs if row.construct in with_cells]
        aside = sum(not cell.used for cell in result.cells)
        excluded = f"; {counted(aside, 'cell')} {'was' if aside == 1 else 'were'} set aside" if aside else ""
        sentences.append(
            f"Charge-voltage (Q-V) curves of {counted(len(with_cells), 'construct')} with "
            f"{_between(numbers)} cells each ({counted(sum(numbers), 'cell')} in all{excluded}) were "
            f"analysed with cornerwise {result.versions.get('cornerwise', '')}. The median voltage Vm of a "
            "curve is the voltage that makes the area under the curve, scaled between its plateaus, to its "
            "left equal to the area above the curve to its right, which is the integral of V dq "
            f"{cited('linked')}. Each cell kept its own plateaus and position; the shape of the curve was "
            "estimated from all cells of a construct together."
        )
    summarised = [row for row in result.constructs if row.construct not in with_cells]
    if summarised:
        sentences.append(
            f"Median voltages of {counted(len(summarised), 'construct')} entered as mean, standard "
            "error and "
            "number of cells."
        )
    return " ".join([*sentences, charge_sentence(result)])


def charge_sentence(result: Result) -> str:
    """Whose total charge the energies were formed with."""
    charge = result.settings.charge
    if isinstance(charge, StatedCharge):
        stated = with_uncertainty(charge.value_e0, charge.sem_e0)
        source = f"; {charge.citation}" if charge.citation else ""
        return (
            f"One total gating charge of {stated} e0 per channel (value and standard uncertainty{source}) "
            "was used for every construct and counted as a single source of error."
        )
    if charge == "wild-type":
        wild = result.constructs[0]
        return (
            f"The total gating charge of {wild.construct}, "
            f"{with_uncertainty(wild.charge_e0, wild.charge_sem_e0)} e0 per channel, was used for every "
            "construct and counted as a single source of error."
        )
    assumed = [row.construct for row in result.constructs if row.charge_verdict == "assumed"]
    measured = len(result.constructs) - len(assumed)
    kinds = Counter(row.charge_source for row in result.constructs if row.charge_verdict != "assumed")
    by = " and ".join(kind for kind in kinds if kind not in ("measured", "wild type"))
    text = f"Total gating charge per channel was measured{f' by {by}' if by else ''} on " + counted(
        measured, "construct"
    )
    if assumed:
        text += f"; that of {', '.join(assumed)} was not measured and was taken to be the wild type's"
    return f"{text}."


def _energies(result: Result, cited: _Cited) -> str:
    settings = result.settings
    voltage = settings.reference_voltage_mv
    factor = energy_per_e0_mv(settings.energy_unit, settings.temperature_c)
    orders = {row.order for row in result.interactions}
    energy = "F Q Vm" if voltage == 0 else f"F Q (Vm - V) at V = {voltage:g} mV"
    text = (
        f"The free energy of activation of a construct, per channel, is {energy}, with total charge Q and "
        f"F = {factor:.5g} {settings.energy_unit} per e0 and mV {cited('linked')}. The interaction "
        "energy of "
        f"a cycle is {formula(voltage)} "
        f"{cited('cycle', 'higher') if max(orders, default=2) > 2 else cited('cycle')}; "
        f"{'; '.join(sign_sentences(orders))}. "
        "An interaction energy is a difference between two states and no proof of a contact."
    )
    if settings.energy_unit == "kT":
        text += f" T is {settings.temperature_c:g} degrees Celsius."
    if settings.subunits > 1:
        text += f" The channel has {settings.subunits} subunits, each with the mutations."
    return text


def _uncertainty(result: Result, cited: _Cited) -> str:
    settings = result.settings
    offset = (
        f", a voltage offset common to all curves (standard uncertainty {settings.voltage_offset_mv:g} mV)"
        if settings.voltage_offset_mv
        else ""
    )
    text = (
        f"Uncertainties follow from the law of propagation of uncertainty {cited('gum')} over independent "
        "sources (the cells of each construct, the charges"
        f"{offset}), each of which counts once however many corners share it. {_intervals(result, cited)} "
        "A bootstrap over cells within constructs "
        f"({settings.replicates} replicates, seed {settings.seed}; percentiles expanded to the same "
        "degrees "
        f"of freedom {cited('bootstrap')}) served as a check. "
    )
    return f"{text}{batch_sentence(result)}{_many(result, cited)}"


def batch_sentence(result: Result) -> str:
    """How many cycles count batches rather than cells."""
    ruled = {
        "within batches": "constructs that share their batches were compared within batches",
        "batch means": "constructs that do not share their batches entered by batch means",
    }
    parts = []
    for rule, words in ruled.items():
        number = sum(any(units.rule == rule for units in row.units) for row in result.interactions)
        if number:
            parts.append(f"in {counted(number, 'cycle')}, {words}")
    sentence = "; ".join(parts)
    return f"{sentence[0].upper()}{sentence[1:]}. " if sentence else ""


# Name of a method of adjusting p values, and the reference it has.
ADJUSTMENTS: Mapping[Adjustment, tuple[str, str]] = {
    "holm": ("Holm's method", "holm"),
    "benjamini-hochberg": ("the method of Benjamini and Hochberg", "discovery"),
}


def _intervals(result: Result, cited: _Cited) -> str:
    """How the intervals that the verdicts go by were formed."""
    settings = result.settings
    level, by_t = percent(settings.confidence), cited("welch", "satterthwaite")
    if settings.interval == "monte-carlo":
        return (
            f"{level} intervals of interactions come from a Monte Carlo propagation of Student's t "
            f"distributions {cited('monte carlo')}; those of constructs, and p values, from Student's t with "
            f"Welch-Satterthwaite degrees of freedom {by_t}."
        )
    return (
        f"Intervals are {level} intervals by Student's t with Welch-Satterthwaite degrees of freedom {by_t}."
    )


def _many(result: Result, cited: _Cited) -> str:
    settings, number = result.settings, len(result.interactions)
    if number < 2:
        return "The p value is two-sided."
    name, key = ADJUSTMENTS[settings.adjustment]
    order = "absolute size" if settings.rank_by == "estimate" else "the lower limit of the absolute size"
    return (
        f"Two-sided p values were adjusted for {counted(number, 'cycle')} by {name} {cited(key)}. "
        "Cycles are "
        f"ranked by {order}; the interval of a rank counts the cycles shown to be stronger and weaker."
    )


def _judgement(result: Result, cited: _Cited) -> str:
    settings = result.settings
    unit = settings.energy_unit
    return (
        f"A pair is called coupled when its whole interval lies beyond {settings.energy_threshold:.3g} "
        f"{unit} on one side of 0, detected when the interval excludes 0 (both only with an adjusted p "
        f"of at most {1 - settings.confidence:.3g}), uncoupled when neither holds and it lies inside that "
        "threshold, and "
        f"unresolved otherwise. {_charge_judgement(result, cited)}"
    )


def _charge_judgement(result: Result, cited: _Cited) -> str:
    """How the charges were compared; where none was, that their equality is assumed."""
    settings = result.settings
    if all(row.charge_verdict in (None, "assumed") for row in result.constructs):
        return (
            "That all constructs move the same total charge is an assumption here: it was not tested, "
            "and an "
            "error of it is no part of the intervals."
        )
    inner = percent(round(2 * settings.confidence - 1, 6))
    return (
        "A mutant's total charge is called equal to the wild "
        f"type's when the {inner} interval of their ratio lies inside 1 ± {settings.charge_margin:g} (two "
        f"one-sided tests {cited('equivalence')}), and changed when its {percent(settings.confidence)} "
        "interval excludes 1 and the charge is not equal in that sense. Median voltages alone are "
        "called a valid shortcut when all charges are equal "
        "and the interval of the error they would make lies inside "
        f"{settings.energy_tolerance:.3g} {settings.energy_unit}."
    )


def _outcome(result: Result) -> str:
    words = ("coupled", "detected", "uncoupled", "unresolved")
    verdicts = Counter[str](row.interaction_verdict for row in result.interactions)
    parts = [f"{verdicts[word]} {word}" for word in words if verdicts[word]]
    number = len(result.interactions)
    if not number:
        return "No cycle is complete."
    *most, last = parts
    listed = f"{', '.join(most)} and {last}" if most else last
    return f"By these rules the verdicts on {counted(number, 'cycle')} are: {listed}."


def _distances(result: Result) -> list[str]:
    """Where the distances between side chains come from, if there are any."""
    sources = distance_sources(result.interactions)
    if not sources:
        return []
    number = sum(row.distance_angstrom is not None for row in result.interactions)
    return [
        f"Distances between the side chains of {counted(number, 'native pair')} stand beside the energies "
        f"for comparison and entered no computation ({'; '.join(sources)}). A structure shows one state of "
        "the protein."
    ]


def figure_legends(result: Result) -> dict[str, str]:
    """A legend for each kind of figure.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.

    Returns
    -------
    dict of str to str
        By kind, as in the names of the figure files: ``interactions``, ``matrix``, ``charges``,
        ``budget``, ``shape``, ``curves``, ``voltage``.
    """
    settings = result.settings
    level, unit = percent(settings.confidence), f"{settings.energy_unit} per channel"
    signs = "; ".join(sign_sentences({row.order for row in result.interactions}))
    stated = formula(settings.reference_voltage_mv)
    cells = [row.cells_used for row in result.constructs if row.cells_used]
    n = f"n = {_between(cells)} cells a construct" if cells else "summaries only"
    band = f"{settings.energy_threshold:.3g} {unit}"
    return {
        "interactions": (
            f"Interaction energies I ({unit}) of {counted(len(result.interactions), 'cycle')}, strongest "
            f"first, with {level} intervals ({n}). {stated}. {signs}. Grey band: threshold of "
            f"{band}. Disc, coupled; lozenge, detected; ring, uncoupled; cross, unresolved. An arrowhead "
            "marks an interval that goes on."
        ),
        "matrix": (
            f"Interaction energies I ({unit}) residue by residue; {n}. Disc, I > 0; square, I < 0; filled "
            f"where the {level} interval excludes 0 and the adjusted p is at most "
            f"{1 - settings.confidence:.3g}. The area is proportional to the size of I. {stated}. "
            f"{signs}. Empty: not studied. Cycles of order 3 and above are not shown."
        ),
        "charges": (
            f"Total charge per channel relative to {settings.wild_type}. Rings, single cells; symbols, "
            f"ratio of the means with its {level} interval: ring, equal within "
            f"{percent(settings.charge_margin)} (grey band); disc, changed; cross, unresolved."
        ),
        "budget": (
            "Shares of the squared standard uncertainty u of each interaction energy "
            f"({unit}), the largest source first and named; sources shared by several corners count once."
        ),
        "shape": (
            f"Activation free energies ({unit}, estimate ± standard uncertainty) of the constructs of a "
            "cycle, what each mutation adds along the edges, and the interaction energy I with its "
            f"{level} interval. {stated}. {signs}. Dark bar, enters with a plus; pale bar, with a minus."
        ),
        "curves": (
            f"Charge-voltage curves of a cycle's constructs: points, every cell ({n}), crosses those set "
            "aside; line, mean of the fitted curves; dashed, median voltage Vm, which makes the two shaded "
            "areas equal."
        ),
        "voltage": (
            f"Interaction energy against voltage ({unit}), I(V) = I - F V J, where the total charges "
            "around "
            f"the cycle do not add up (J is not 0), with its {level} interval. Grey band: threshold, "
            f"{band}."
        ),
    }
