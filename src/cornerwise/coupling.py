"""From a campaign to a result: the one function that runs every step."""

from __future__ import annotations

import platform
from collections.abc import Callable, Sequence
from importlib.metadata import version

from .backgrounds import background_rows
from .batches import units_notes
from .campaign import Campaign, Settings, StatedCharge
from .charges import LIMITING_SLOPE
from .construct_rows import cell_rows, construct_row
from .energies import EnergyBook
from .interaction_rows import Corners, interaction_rows
from .measurements import SET_ASIDE, Measurement, measure
from .mutations import incomplete_cycles, lacking
from .plan_rows import NextStepRow
from .planning.next_steps import next_steps
from .result import Result
from .rows import BackgroundRow, BudgetRow, CellRow, ConstructRow, InteractionRow
from .tables import Table

MOST_INCOMPLETE = 5  # constructs without a cycle that are named

_RECORDED_VERSIONS = ("cornerwise", "numpy", "scipy", "pandas")

Progress = Callable[[str, int, int], None]


def _versions() -> dict[str, str]:
    return {"python": platform.python_version(), **{name: version(name) for name in _RECORDED_VERSIONS}}


def _notes(measurements: Sequence[Measurement], settings: Settings) -> tuple[str, ...]:
    """Decisions that follow from the settings and that a reader of the numbers should know of."""
    notes = []
    measured = [m.label for m in measurements if m.charge_e0 is not None and m.label != settings.wild_type]
    if settings.charge != "measured" and measured:
        shared = "the stated" if isinstance(settings.charge, StatedCharge) else "the wild type's"
        notes.append(
            f"energies use {shared} total charge for every construct as the settings ask; the measured "
            f"charges of {', '.join(measured)} serve only for charge verdicts and the shortcut's bias"
        )
    unread = [
        cell.subject
        for m in measurements
        for cell in m.cells
        if not cell.used and not (cell.reason or "").startswith(SET_ASIDE)
    ]
    if unread:
        notes.append(
            f"not used, as no median can be read from their curves: {', '.join(unread)}; cells.csv says why"
        )
    sloped = [m.label for m in measurements if m.charge is not None and m.charge.kind == LIMITING_SLOPE]
    if sloped:
        notes.append(
            f"the total charge of {', '.join(sloped)} is a limiting slope of the open probability, which "
            "sees only charge coupled to opening"
        )
    if settings.subunits > 1:
        notes.append(
            f"every energy is per channel; the protein has {settings.subunits} subunits and each carries "
            "the mutations, so an energy per subunit is that of the channel divided by "
            f"{settings.subunits}; it has been divided nowhere but in per_subunit.csv"
        )
    return tuple(notes)


def _incomplete_notes(campaign: Campaign) -> tuple[str, ...]:
    """Constructs with two mutations or more that are in no energy, since their cycle lacks a corner."""
    if campaign.requests:  # whoever names the cycles to be computed leaves out the others on purpose
        return ()
    labels = {frozenset(construct.mutations): construct.label for construct in campaign.constructs}
    incomplete = incomplete_cycles(labels)
    told = [lacking(label, missing) for label, missing in incomplete[:MOST_INCOMPLETE]]
    if more := len(incomplete) - len(told):
        told.append(
            f"no cycle of {more} more construct{'s' * (more > 1)} either; cornerwise check names them all"
        )
    return tuple(told)


def _units_notes(
    interactions: Sequence[InteractionRow], constructs: Sequence[ConstructRow]
) -> tuple[str, ...]:
    """What was counted where cells were recorded in batches."""
    return (
        *units_notes("interaction", [(row.cycle, row.units) for row in interactions]),
        *units_notes("energy", [(row.construct, row.units) for row in constructs]),
    )


def ranking_notes(interactions: Sequence[InteractionRow]) -> tuple[str, ...]:
    """A warning that the top of a ranking is too good to be true, where shrunken estimates tell.

    Parameters
    ----------
    interactions : sequence of InteractionRow
        Every cycle.

    Returns
    -------
    tuple of str
        One sentence or none.
    """
    first = [row for row in interactions if row.rank == 1]
    ranked = sum(row.rank is not None for row in interactions)
    if not first or first[0].interaction is None or first[0].shrunken is None:
        return ()
    (top,) = first
    if top.shrunken == top.interaction:
        return ()
    return (
        f"the strongest of {ranked} interactions tend to exaggerate, chance having helped to put them there: "
        f"{top.cycle} at {top.interaction:.2f} {top.energy_unit} is likely to be worth {top.shrunken:.2f}; "
        "the ranking gives such an estimate for every cycle",
    )


def couple(campaign: Campaign, progress: Progress | None = None) -> Result:
    """Compute the interaction energy of every cycle with its uncertainty and verdicts.

    Parameters
    ----------
    campaign : Campaign
        What was read; see `cornerwise.read`.
    progress : callable, optional
        Called with a step's name, how much of it is done and how much there is.

    Returns
    -------
    Result
        Tables of interactions, constructs, cells and the uncertainty budget, with flags and settings. The
        same campaign gives the same result to the last bit.
    """

    def step(name: str) -> Callable[[int, int], None] | None:
        return None if progress is None else lambda done, total: progress(name, done, total)

    settings = campaign.settings
    measured = measure(campaign, step("median voltages"))
    measurements = {measurement.label: measurement for measurement in measured}
    book = EnergyBook(measured, settings)
    described = [construct_row(measurement, book, measurements, settings) for measurement in measured]
    rows = {row.construct: row for row, _, _ in described}
    charges = {row.construct: judged for row, _, judged in described if judged is not None}
    corners = Corners(
        measurements=measurements,
        rows=rows,
        charges=charges,
        settings=settings,
        distances=campaign.distances,
    )
    interactions, budget, flags = interaction_rows(campaign.cycles, book, corners, step("interactions"))
    return Result(
        settings=settings,
        background=tuple(map(str, campaign.background)),
        interactions=Table(InteractionRow, interactions),
        constructs=Table(ConstructRow, list(rows.values())),
        cells=Table(CellRow, [row for measurement in measured for row in cell_rows(measurement)]),
        budget=Table(BudgetRow, budget),
        backgrounds=Table(BackgroundRow, background_rows(campaign.cycles, book, settings)),
        next_steps=Table(NextStepRow, next_steps(interactions, campaign.cycles, book, settings)),
        flags=(*(flag for _, own, _ in described for flag in own), *flags),
        notes=(
            *campaign.notes,
            *_incomplete_notes(campaign),
            *_notes(measured, settings),
            *_units_notes(interactions, list(rows.values())),
            *ranking_notes(interactions),
        ),
        inputs=campaign.inputs,
        versions=_versions(),
    )
