"""The public `plan` and `plan_assumed`: what to expect of further recordings and where they earn most."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ..campaign import Campaign
from ..errors import UsageError
from ..plan_rows import NeedRow, OutlookRow, SplitRow
from ..tables import Table, available
from ..units import EnergyUnit
from .assumed import Assumptions
from .board import Board
from .goals import Goal, Judged, NarrowEnough, StrongEnough, Verdict
from .needs import Aim, need, need_of_all
from .outlook import expected_half_width, outlook
from .prospects import Prospect, Recording, brought_to, kept_cells
from .request import PlanRequest
from .search import Criterion, equal_shares, spend, value_of
from .subjects import Progress, Subject, of_assumptions, of_campaign

IntArray = NDArray[np.int64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Split:
    """What the best split of a number of recordings comes to: the criterion, in the energy unit."""

    criterion: Criterion
    recordings: int
    before: float | None  # None where it starts without cells
    best: float
    equal: float  # the same number of further cells of every kind


@dataclass(frozen=True, kw_only=True, slots=True)
class Plan:
    """What to expect of further recordings and where they earn most."""

    title: str
    energy_unit: EnergyUnit
    confidence: float
    true_interaction: float  # against which power counts
    adjusted_for: int  # cycles of the campaign; `couple` adjusts p values for them, power does not
    request: PlanRequest
    cells: tuple[int, ...]  # numbers of cells told of; `outlooks` may hold more, for a figure
    outlooks: Table[OutlookRow]  # by cycle, then by cells
    needs: Table[NeedRow]  # by goal, then by estimate, all at once last
    splits: Table[SplitRow]  # empty unless a number of recordings was asked about
    split: Split | None
    notes: tuple[str, ...]


def plan(campaign: Campaign, request: PlanRequest | None = None, progress: Progress | None = None) -> Plan:
    """Plan further recordings of a pilot campaign.

    Parameters
    ----------
    campaign : Campaign
        What was read; see `cornerwise.read`. Its cells stay and its scatters are taken with the
        uncertainty their number of cells leaves.
    request : PlanRequest, optional
        What to answer.
    progress : callable, optional
        Called with a step's name, how much of it is done and how much there is.

    Returns
    -------
    Plan
        Half-width and power by number of cells, the fewest further cells for the goals, and the best split
        of a number of recordings.

    Raises
    ------
    UsageError
        If there is no cycle, or none of a name that is asked for.
    """
    asked = request or PlanRequest()
    return _plan(of_campaign(campaign, asked, progress), asked, progress)


def plan_assumed(
    assumed: Assumptions, request: PlanRequest | None = None, *, confidence: float = 0.95
) -> Plan:
    """Plan a campaign that is yet to be recorded.

    Parameters
    ----------
    assumed : Assumptions
        Medians, charges and scatters that are expected.
    request : PlanRequest, optional
        What to answer.
    confidence : float, optional
        Of the intervals.

    Raises
    ------
    UsageError
        If cycles are asked for by name.
    """
    if not 0.5 < confidence < 1:
        raise UsageError(f"the confidence lies between 0.5 and 1; found {confidence:g}")
    asked = request or PlanRequest()
    return _plan(of_assumptions(assumed, asked, confidence), asked, None)


def _plan(subject: Subject, request: PlanRequest, progress: Progress | None) -> Plan:
    truth = subject.threshold if request.interaction is None else request.interaction
    splits, split = _split(subject, request)
    kept = [term.kept for one in subject.cycles for term in one.terms]
    told = request.told_of(kept)
    return Plan(
        title=subject.title,
        energy_unit=subject.energy_unit,
        confidence=subject.confidence,
        true_interaction=truth,
        adjusted_for=subject.adjusted_for,
        request=request,
        cells=told,
        outlooks=Table(OutlookRow, _outlooks(subject, request.drawn_at(told, kept), truth, progress)),
        needs=Table(NeedRow, _needs(subject, request, truth, progress)),
        splits=Table(SplitRow, splits),
        split=split,
        notes=subject.notes,
    )


def _outlooks(
    subject: Subject, numbers: Sequence[int], truth: float, progress: Progress | None
) -> list[OutlookRow]:
    rows = []
    for done, (one, order) in enumerate(zip(subject.cycles, subject.orders, strict=True), start=1):
        now = [None] if any(term.kept for term in one.terms) else []
        rows += [_outlook(one, order, cells, truth, subject) for cells in (*now, *numbers)]
        if progress is not None:
            progress("half-widths", done, len(subject.cycles))
    return rows


def _outlook(one: Prospect, order: int, cells: int | None, truth: float, subject: Subject) -> OutlookRow:
    totals = kept_cells([one]) if cells is None else brought_to([one], cells)
    unsaid = cells is None and any(term.lent for term in one.terms)
    known = outlook(one, totals, truth=truth, confidence=subject.confidence)
    width, power = known.half_width, known.power

    def told(value: float) -> float | None:
        return None if unsaid else available(value)

    return OutlookRow(
        cycle=one.name,
        order=order,
        cells_each=cells,
        half_width=told(width.expected),
        half_width_low=told(width.low),
        half_width_high=told(width.high),
        power=told(power.expected),
        power_low=told(power.low),
        power_high=told(power.high),
        assurance=told(known.assurance),
        true_interaction=truth,
        confidence=subject.confidence,
        energy_unit=subject.energy_unit,
    )


def _goals(subject: Subject, request: PlanRequest, truth: float) -> list[Goal]:
    """Goals for the interactions; without any other question, a power against the threshold."""
    goals: list[Goal] = []
    if request.half_width is not None:
        goals.append(NarrowEnough(wanted=request.half_width, confidence=subject.confidence))
    others = (request.half_width, request.charge_verdict, request.recordings)
    asked = request.interaction is not None or (request.power is not None and request.charge_verdict is None)
    if asked or all(other is None for other in others):
        goals.append(StrongEnough(wanted=request.probability, truth=truth, confidence=subject.confidence))
    return goals


def _needs(subject: Subject, request: PlanRequest, truth: float, progress: Progress | None) -> list[NeedRow]:
    groups = [
        [Aim(prospect=one, goal=goal) for one in subject.cycles] for goal in _goals(subject, request, truth)
    ]
    if request.charge_verdict is not None:
        groups.append(_charge_aims(subject, request, request.charge_verdict))
    rows = []
    for aims in groups:
        starts = _starts([aim.prospect for aim in aims])
        for done, aim in enumerate(aims, start=1):
            rows.append(need(aim, starts))
            if progress is not None:
                progress("cells needed", done, len(aims))
        together = need_of_all(aims, starts)
        rows += [] if together is None else [together]
    return rows


def _charge_aims(subject: Subject, request: PlanRequest, verdict: Verdict) -> list[Aim]:
    if not subject.ratios:
        raise UsageError(
            "no charge can be judged: it takes charges measured on the wild type and on a mutant"
        )
    truth = None if request.charge_ratio is None else math.log(request.charge_ratio)
    goal = Judged(
        wanted=request.probability,
        verdict=verdict,
        margin=subject.margin,
        level=subject.confidence,
        truth=truth,
    )
    return [Aim(prospect=one, goal=goal.of(one.value)) for one in subject.ratios]


def _starts(prospects: Sequence[Prospect]) -> dict[Recording, int]:
    """Cells a search starts from: those there are, or the fewest that may be planned."""
    starts: dict[Recording, int] = {}
    for one in prospects:
        for term in one.terms:
            own = round(term.kept) if term.kept else term.least
            starts[term.recording] = max(own, starts.get(term.recording, 0))
    return starts


def _split(subject: Subject, request: PlanRequest) -> tuple[list[SplitRow], Split | None]:
    known = [one for one in subject.cycles if not one.unknown]
    if request.recordings is None or not known:
        return [], None
    board = Board(known, [subject.confidence] * len(known))
    kept, floor = board.kept, board.totals(_starts(known))
    start = np.maximum(kept, floor)
    left = request.recordings - int(np.sum(start - kept))
    if left < 0:
        raise UsageError(
            f"{request.recordings} recordings are too few: {int(np.sum(start - kept))} give each of "
            f"{len(start)} kinds of cell the fewest that show a scatter"
        )
    best = spend(board, start, left, request.criterion)
    equal = equal_shares(board, start, left)

    def worth(totals: IntArray) -> float:
        widths = [expected_half_width(one, board.named(totals), subject.confidence) for one in known]
        return value_of(np.array(widths), request.criterion)

    rows = [
        SplitRow(
            construct=one.construct,
            kind=one.kind,
            cells_now=int(kept[place]),
            further=int(best[place] - kept[place]),
            further_equal_split=int(equal[place] - kept[place]),
            cycles=len(board.rows_with(place)),
        )
        for place, one in enumerate(board.recordings)
    ]
    return rows, Split(
        criterion=request.criterion,
        recordings=int(np.sum(best - kept)),
        before=worth(kept) if (kept >= 2).all() else None,
        best=worth(best),
        equal=worth(equal),
    )
