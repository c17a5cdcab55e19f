"""The cycles of a campaign: those asked for, or every complete one."""

from __future__ import annotations

from collections.abc import Mapping, Sequence, Set

from ..mutations import (
    HIGHEST_LISTED_ORDER,
    Cycle,
    CycleRequest,
    Mutation,
    Mutations,
    complete_cycle,
    find_cycles,
    incomplete_cycles,
    joined,
    missing_corners,
)
from .findings import Findings, nearest, shown
from .labels import Genotypes
from .settings import Document

MOST_LISTED = 5  # incomplete cycles named when there is no complete one


def cycles_of(
    requests: Sequence[CycleRequest], genotypes: Genotypes, document: Document, findings: Findings
) -> tuple[Cycle, ...]:
    """Put together the cycles asked for, in the order of `requests`, or find every complete one.

    Parameters
    ----------
    requests : sequence of CycleRequest
        The ``[[cycle]]`` entries; empty when cycles are to be found.
    genotypes : Genotypes
        The mutations of every construct.
    document : Document
        For the place of the fault when no cycle is found.
    findings : Findings
        Takes incomplete cycles that were asked for, and the lack of any cycle.
    """
    labels = genotypes.labels
    if requests:
        carried = {mutation for mutations in labels for mutation in mutations}
        complete = [
            request
            for request in requests
            if _all_carried(request, genotypes, carried, findings) and _is_complete(request, labels, findings)
        ]
        return tuple(complete_cycle(request.mutations, labels, request.name) for request in complete)
    found = find_cycles(labels)
    if not found:
        _refuse_no_cycle(labels, document, findings)
    return found


def _all_carried(
    request: CycleRequest, genotypes: Genotypes, carried: Set[Mutation], findings: Findings
) -> bool:
    """Whether every mutation of a cycle is carried by some construct and not by all; if not, a fault each."""
    shared = [mutation for mutation in request.mutations if mutation in genotypes.background]
    unknown = [
        mutation for mutation in request.mutations if mutation not in carried and mutation not in shared
    ]
    for mutation in shared:
        findings.add(
            request.origin,
            found=f"the mutation {mutation}, which the wild type carries too",
            expected="mutations against the wild type",
            remedy="leave the background mutation out of the cycle",
        )
    for mutation in unknown:
        close = nearest(mutation.text, map(str, carried))
        findings.add(
            request.origin,
            found=f"the mutation {mutation}, which no construct carries",
            expected="mutations of the constructs in the tables",
            remedy=f"did you mean {close}?" if close else "correct it, or add the constructs that carry it",
        )
    return not shared and not unknown


def _is_complete(request: CycleRequest, labels: Mapping[Mutations, str], findings: Findings) -> bool:
    corners = 2 ** len(request.mutations)
    if len(request.mutations) > HIGHEST_LISTED_ORDER and corners > len(labels):
        missing = f"fewer than the {corners} constructs it needs"
    elif lacking := missing_corners(request.mutations, labels):
        missing = f"no construct {', '.join(lacking)}"
    else:
        return True
    name = request.name or joined(request.mutations)
    findings.add(
        request.origin,
        found=f"the cycle {shown(name)} with {missing}",
        expected=f"all {corners} constructs: the wild type and every combination of its mutations",
        remedy="add the missing data, or delete this [[cycle]] entry",
    )
    return False


def _refuse_no_cycle(labels: Mapping[Mutations, str], document: Document, findings: Findings) -> None:
    nearest_first = sorted(incomplete_cycles(labels), key=lambda candidate: len(candidate[1]))
    told = [f"{label} lacks {', '.join(missing)}" for label, missing in nearest_first[:MOST_LISTED]]
    findings.add(
        document.origin(),
        found=f"no complete cycle ({'; '.join(told) or 'no construct carries two mutations or more'})",
        expected="the wild type, each single mutant and the double mutant of at least one pair",
        remedy="add the missing constructs, or list the mutations of labels that hide them under [mutations]",
    )
