"""From settings and tables to the campaign."""

from __future__ import annotations

from collections import defaultdict

from ..campaign import Campaign, ChargeReplicate, ChargeSummary, Construct, Curve, OpeningCurve
from ..mutations import Mutation
from .checks import check, meant_wild_type
from .cycles import cycles_of
from .exclusions import check_exclusions
from .findings import Findings, refuse_many
from .labels import Genotypes, read_genotypes
from .pair_distances import pair_distances
from .parts import Parts
from .shared_cells import unpaired_cells

MOST_CONSTRUCTS = 5000


def assemble(parts: Parts, findings: Findings) -> Campaign:
    """Put the campaign together.

    Parameters
    ----------
    parts : Parts
        All that was read.
    findings : Findings
        Takes everything that does not fit together or is missing.

    Returns
    -------
    Campaign
        To be used only if there are no findings.
    """
    if len(parts.seen) > MOST_CONSTRUCTS:
        refuse_many(f"{len(parts.seen)} constructs", MOST_CONSTRUCTS, findings)
        return Campaign(settings=parts.settings, constructs=(), cycles=())
    parts = meant_wild_type(parts, findings)
    genotypes = read_genotypes(parts.seen, parts.settings.wild_type, parts.listed, findings)
    check(parts, genotypes, findings)
    known = parts.settings.wild_type in parts.seen
    cycles = (
        cycles_of(parts.requests, genotypes, parts.document, findings)
        if known and parts.whole and genotypes.whole
        else ()
    )
    check_exclusions(parts, cycles if parts.requests else (), findings)
    distances, of_distances = pair_distances(parts, genotypes, cycles, findings)
    return Campaign(
        settings=parts.settings,
        constructs=_constructs(parts, genotypes),
        cycles=cycles,
        requests=parts.requests,
        background=genotypes.background,
        exclusions=tuple(parts.exclusions),
        inputs=parts.inputs,
        distances=distances,
        notes=(*parts.notes, *unpaired_cells(parts), *of_distances),
    )


def _constructs(parts: Parts, genotypes: Genotypes) -> tuple[Construct, ...]:
    """The wild type, then by number of mutations and residue order."""
    curves: dict[str, list[Curve]] = defaultdict(list)
    for curve in parts.curves.curves:
        curves[curve.construct].append(curve)
    replicates: dict[str, list[ChargeReplicate]] = defaultdict(list)
    for replicate in parts.charges.replicates:
        replicates[replicate.construct].append(replicate)
    medians = {median.construct: median for median in parts.medians.medians}
    charges: dict[str, list[ChargeSummary]] = defaultdict(list)
    for charge in parts.charges.summaries:
        charges[charge.construct].append(charge)
    openings: dict[str, list[OpeningCurve]] = defaultdict(list)
    for opening in parts.openings.openings:
        openings[opening.construct].append(opening)
    in_order = sorted(genotypes.by_label.items(), key=lambda item: _order(item[1]))
    return tuple(
        Construct(
            label=label,
            mutations=mutations,
            curves=tuple(curves[label]),
            median=medians.get(label),
            charge_replicates=tuple(replicates[label]),
            charge_summaries=tuple(charges[label]),
            openings=tuple(openings[label]),
        )
        for label, mutations in in_order
    )


def _order(mutations: tuple[Mutation, ...]) -> tuple[int, list[tuple[bool, int, str]]]:
    return len(mutations), [mutation.residue_order for mutation in mutations]
