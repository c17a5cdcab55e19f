"""The gating model in a model file: steps, couplings, states beside them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from ...campaign import Settings
from ...simulation.model import ACTIVATED, REST, Coupling, Order, SideState, Step
from ...simulation.schemes import states_number
from ...units import energy_per_e0_mv
from ..findings import Findings, shown
from ..rules import say
from ..settings import Document
from .keys import COUPLING_RULES, GATING_RULES, SIDE_RULES, STEP_RULES
from .parts import Part, entries_of, table_of

MOST_STATES = 2000


@dataclass(frozen=True, kw_only=True, slots=True)
class Gating:
    """What the gating model is made of; energies in meV."""

    order: Order
    opening: str | None
    steps: tuple[Step, ...]
    couplings: tuple[Coupling, ...]
    sides: tuple[SideState, ...]

    @property
    def step_names(self) -> list[str]:
        """Names of the steps."""
        return [step.name for step in self.steps]

    @property
    def state_names(self) -> list[str]:
        """Names of the states: the ends, in a sequence those that steps lead to, and those beside."""
        between = self.step_names if self.order == "sequence" else []
        return [REST, *between, ACTIVATED, *(side.name for side in self.sides)]


def mev_per_unit(settings: Settings) -> float:
    """Energy in meV of one unit of the campaign's energies."""
    return 1.0 / energy_per_e0_mv(settings.energy_unit, settings.temperature_c)


def read_gating(document: Document, settings: Settings, findings: Findings) -> Gating:
    """Read the tables ``[gating]``, ``[[step]]``, ``[[coupling]]`` and ``[[side]]``.

    Returns
    -------
    Gating
        To be used only if there are no findings.
    """
    part, mev = table_of(document, "gating", findings), mev_per_unit(settings)
    choices = part.read(GATING_RULES, findings)
    order = choices.get("order", "sequence")
    steps = _steps(document, mev, findings)
    names = [step.name for step in steps]
    if order == "sequence":
        _refuse_couplings(document, findings)
    opening = choices.get("opening")
    if opening is not None and opening not in names:
        part.refuse_name(("opening",), opening, names, findings)
    if steps and states_number(steps, order) > MOST_STATES:
        findings.add(
            part.origin("order"), found=f"{states_number(steps, order)} states",
            expected=f"at most {MOST_STATES}", remedy="use fewer steps or copies",
        )  # fmt: skip
    couplings = () if order == "sequence" else _couplings(document, names, mev, findings)
    bare = Gating(order=order, opening=opening, steps=steps, couplings=couplings, sides=())
    if "activation_energy" in choices and steps:
        bare = replace(bare, steps=_moved(bare, choices["activation_energy"] * mev))
    return replace(bare, sides=_sides(document, bare.state_names, mev, findings))


def _steps(document: Document, mev: float, findings: Findings) -> tuple[Step, ...]:
    entries = entries_of(document, "step", findings)
    if not entries:
        findings.add(
            document.origin("step"), found="no step", expected="at least one [[step]] with a charge",
            remedy='add [[step]] with the lines name = "activation", charge_e0 = 12.0 and midpoint_mV = -40',
        )  # fmt: skip
    steps = tuple(_step(entry, mev, findings) for entry in entries)
    _refuse_repeats(entries, [REST, ACTIVATED], findings)
    if steps and not any(step.charge_e0 > 0 for step in steps):
        findings.add(
            document.origin("step"), found="steps without charge", expected="a step that moves charge",
            remedy="give charge_e0 above 0 to at least one step",
        )  # fmt: skip
    return steps


def _step(entry: Part, mev: float, findings: Findings) -> Step:
    """Read one step; one at fault keeps its name, so that what refers to it is no fault."""
    values = entry.read(STEP_RULES, findings)
    entry.lacks(("name", "charge_e0"), findings)
    if ("midpoint_mV" in entry.values) == ("energy" in entry.values):
        both = "midpoint_mV" in entry.values
        findings.add(
            entry.origin("energy"), found="both midpoint_mV and energy" if both else "no midpoint_mV",
            expected="either the voltage at which the step is half done, or its energy at 0 mV",
            remedy="delete one of the two" if both else "add a line midpoint_mV = -40 with your own value",
        )  # fmt: skip
        return _stand_in(entry)
    charge, midpoint = values.get("charge_e0"), values.pop("midpoint_mv", None)
    if midpoint is not None and charge == 0.0:
        findings.add(
            entry.origin("midpoint_mV"), found="a midpoint of a step without charge",
            expected="its energy, which is the same at every voltage",
            remedy="write energy = ... instead of midpoint_mV",
        )  # fmt: skip
        return _stand_in(entry)
    energy = values.pop("energy", None)
    if charge is None or "name" not in values or (midpoint is None and energy is None):
        return _stand_in(entry)
    return Step(**values, energy_mev=charge * midpoint if energy is None else energy * mev)


def _stand_in(entry: Part) -> Step:
    return Step(name=str(entry.values.get("name", "")).strip(), charge_e0=1.0, energy_mev=0.0)


def _refuse_repeats(entries: Sequence[Part], taken: Sequence[str], findings: Findings) -> None:
    """Refuse a name that is given twice, or that stands for something else."""
    seen = set(taken)
    for entry in entries:
        name = entry.values.get("name")
        if isinstance(name, str) and name.strip() in seen:
            findings.add(
                entry.origin("name"), found=f"the name {shown(name)} again",
                expected=f"a name of its own for each state, none of them {REST} or {ACTIVATED}",
                remedy="choose another name",
            )  # fmt: skip
        elif isinstance(name, str):
            seen.add(name.strip())


def _moved(gating: Gating, activation_mev: float) -> tuple[Step, ...]:
    """Steps moved by the same voltage, so that the activated state has this energy."""
    copies = {step.name: step.copies for step in gating.steps}
    now = sum(step.copies * step.energy_mev for step in gating.steps)
    now += sum(copies[c.steps[0]] * copies[c.steps[1]] * c.energy_mev for c in gating.couplings)
    shift = (activation_mev - now) / sum(step.copies * step.charge_e0 for step in gating.steps)
    return tuple(replace(step, energy_mev=step.energy_mev + step.charge_e0 * shift) for step in gating.steps)


def _refuse_couplings(document: Document, findings: Findings) -> None:
    if "coupling" in document.values:
        findings.add(
            document.origin("coupling"), found="a coupling of steps that follow one another",
            expected='couplings only with order = "any"',
            remedy='write order = "any" under [gating], or add the energy to the later step',
        )  # fmt: skip


def _couplings(
    document: Document, names: Sequence[str], mev: float, findings: Findings
) -> tuple[Coupling, ...]:
    read = []
    for entry in entries_of(document, "coupling", findings):
        values = entry.read(COUPLING_RULES, findings)
        if entry.lacks(("steps", "energy"), findings):
            continue
        pair = entry.values["steps"]
        if not isinstance(pair, list) or len(pair) != 2 or pair[0] == pair[1]:
            findings.add(
                entry.origin("steps"), found=say(pair), expected="the names of two different steps",
                remedy='write steps = ["sensor", "opening"] with your own names',
            )  # fmt: skip
            continue
        unknown = [name for name in map(str, pair) if name not in names]
        for name in unknown:
            entry.refuse_name(("steps",), name, names, findings)
        if not unknown and "energy" in values:
            read.append(Coupling(steps=(pair[0], pair[1]), energy_mev=values["energy"] * mev))
    return tuple(read)


def _sides(
    document: Document, states: Sequence[str], mev: float, findings: Findings
) -> tuple[SideState, ...]:
    entries, read = entries_of(document, "side", findings), []
    for entry in entries:
        values = entry.read(SIDE_RULES, findings)
        entry.lacks(("name", "beside", "energy"), findings)
        beside, energy = values.get("beside", REST), values.get("energy", 0.0)
        if beside not in states:
            entry.refuse_name(("beside",), beside, states, findings)
        if "name" in values:
            read.append(SideState(name=values["name"], beside=beside, energy_mev=energy * mev))
    _refuse_repeats(entries, states, findings)
    return tuple(read)
