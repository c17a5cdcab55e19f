"""What is planned for: estimates with their scatters, from a pilot campaign or assumed."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from ..batches import units_notes
from ..campaign import Campaign, Settings
from ..charge_judgement import compared_charges
from ..energies import EnergyBook
from ..errors import UsageError
from ..interactions import interact
from ..measurements import measure
from ..mutations import Cycle, name_of_cycle
from ..units import EnergyUnit, convert_energy
from .assumed import Assumptions, assumed_prospects
from .pooling import pooled_scatters
from .prospects import Prospect, prospect
from .request import PlanRequest

Progress = Callable[[str, int, int], None]


@dataclass(frozen=True, kw_only=True, slots=True)
class Subject:
    """What is planned for, wherever its scatters come from."""

    title: str
    energy_unit: EnergyUnit
    confidence: float
    threshold: float
    margin: float
    cycles: tuple[Prospect, ...]
    orders: tuple[int, ...]
    adjusted_for: int  # cycles of the campaign, which p values are adjusted for
    ratios: tuple[Prospect, ...]  # logarithms of the mutants' charges over the wild type's
    notes: tuple[str, ...]


def _chosen(campaign: Campaign, names: Sequence[str]) -> tuple[Cycle, ...]:
    known = {cycle.name: cycle for cycle in campaign.cycles}
    if not known:
        raise UsageError("no cycle is complete, so there is nothing to plan for")
    mutations = {name: [str(one) for one in cycle.mutations] for name, cycle in known.items()}
    chosen = dict.fromkeys(name_of_cycle(name, mutations) for name in names)
    return tuple(known[name] for name in chosen) or campaign.cycles


def of_campaign(campaign: Campaign, request: PlanRequest, progress: Progress | None) -> Subject:
    """Interactions and charge ratios of a pilot campaign.

    Parameters
    ----------
    campaign : Campaign
        The pilot.
    request : PlanRequest
        Which cycles, and whether the pilot's cells stay.
    progress : callable or None
        As for `plan.plan`.

    Raises
    ------
    UsageError
        If there is no cycle, or none of a name that is asked for.
    """
    settings = campaign.settings
    cycles = _chosen(campaign, request.cycles)
    step = None if progress is None else lambda done, total: progress("median voltages", done, total)
    book = EnergyBook(measure(campaign, step), settings)
    scatters = pooled_scatters(book.ledger)
    found = [interact(cycle, book, settings.wild_type) for cycle in cycles]
    prospects = [prospect(one.cycle.name, one.energy, one.ledger, scatters, book.sloping) for one in found]
    ratios = []
    for label in dict.fromkeys(corner.label for cycle in cycles for corner in cycle.corners):
        compared = compared_charges(label, book, settings.wild_type)
        if compared is not None and label != settings.wild_type:
            ratios.append(prospect(label, *compared, scatters))
    return Subject(
        title=settings.title or "Campaign without a title",
        energy_unit=settings.energy_unit,
        confidence=settings.confidence,
        threshold=settings.energy_threshold,
        margin=settings.charge_margin,
        cycles=tuple(_started(one, request) for one in prospects),
        orders=tuple(cycle.order for cycle in cycles),
        adjusted_for=len(campaign.cycles),
        ratios=tuple(_started(one, request) for one in ratios),
        notes=(
            *units_notes("interaction", [(one.cycle.name, one.units) for one in found]),
            *_notes([*prospects, *ratios]),
        ),
    )


def _started(one: Prospect, request: PlanRequest) -> Prospect:
    return one.anew() if request.anew else one


def _notes(prospects: Sequence[Prospect]) -> list[str]:
    """What was taken for granted."""
    terms = [term for one in prospects for term in one.terms]
    notes = []
    lent = dict.fromkeys(f"{t.recording.kind} of {t.recording.construct}" for t in terms if t.lent)
    if lent:
        notes.append(
            f"too few cells to show a scatter, that of the other constructs is used: {', '.join(lent)}"
        )
    if any(term.step > 1 for term in terms):
        notes.append("where batch means are counted, further cells come in further batches of the same size")
    if any(term.step == 1 and term.dof_each < 1 for term in terms):
        notes.append(
            "cycles compared within batches: spread further cells over batches that all constructs of the "
            "cycle share, or they do not count"
        )
    return notes


def of_assumptions(assumed: Assumptions, request: PlanRequest, confidence: float) -> Subject:
    """Interactions and charge ratios of cycles that are yet to be recorded."""
    cycles, ratios = assumed_prospects(assumed)
    unit = assumed.energy_unit
    settings = Settings(wild_type="WT", energy_unit=unit, temperature_c=assumed.temperature_c)
    if request.cycles:
        raise UsageError("cycles can be named only where there is a campaign")
    return Subject(
        title="Constructs as they are assumed",
        energy_unit=unit,
        confidence=confidence,
        threshold=convert_energy(1.0, "kcal/mol", unit, assumed.temperature_c),
        margin=settings.charge_margin,
        cycles=tuple(cycles),
        orders=(assumed.order,) * len(cycles),
        adjusted_for=len(cycles),
        ratios=tuple(ratios),
        notes=(),
    )
