"""What the report's templates show: texts and sort values, formed once from a result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from markupsafe import Markup

from ...flags import Flag
from ...ranking import FEWEST_TO_SHRINK
from ...result import BackgroundRow, CellRow, ConstructRow, InteractionRow, Result
from ..explanation import explain
from ..figures.files import CycleFigures
from ..figures.style import SINGLE_COLUMN_MM
from ..figures.vector import svg_inline
from ..legend import distance_words
from ..ordering import by_strength, grouped
from ..rounding import decimals_for, freedom_words, number, p_words, span, typeset, with_uncertainty
from .strips import Strips

FIGURE_TITLES = {
    "shape": "The cycle",
    "curves": "Charge-voltage curves",
    "voltage": "At other voltages",
    "budget": "Where the uncertainty comes from",
}


@dataclass(frozen=True, kw_only=True, slots=True)
class Cell:
    """One field of a table: what is read and what it is sorted by."""

    text: str
    sort: float | str
    numeric: bool = False


@dataclass(frozen=True, kw_only=True, slots=True)
class Doubt:
    """A flag in words."""

    code: str
    subject: str
    message: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CycleView:
    """One cycle, for its line in the table and its section."""

    anchor: str
    row: InteractionRow
    value: str  # with uncertainty
    interval: str
    rank: str
    p_adjusted: str
    strip: Markup  # interval drawn in the table
    corners: tuple[ConstructView, ...]
    paragraphs: tuple[str, ...]
    figures: tuple[tuple[str, Markup], ...]  # title and drawing
    doubts: tuple[Doubt, ...]
    facts: tuple[tuple[str, str], ...]
    lower_orders: tuple[tuple[str, str, str, str], ...]  # pair, its background, energy, interval


@dataclass(frozen=True, kw_only=True, slots=True)
class ConstructView:
    """One construct with its numbers as text."""

    row: ConstructRow
    median: str
    charge: str
    energy: str
    interval: str
    ratio: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CellView:
    """One cell with its numbers as text."""

    row: CellRow
    median: str
    midpoint: str
    plain_median: str
    plateaus: str
    strip: Markup


def _plateaus(cell: CellRow) -> str:
    """Both plateaus to a thousandth of their distance or better."""
    if cell.low_plateau is None or cell.high_plateau is None:
        return ""
    decimals = decimals_for(abs(cell.high_plateau - cell.low_plateau), digits=4)
    return typeset(f"{number(cell.low_plateau, decimals)} to {number(cell.high_plateau, decimals)}")


def rank_words(row: InteractionRow) -> str:
    """Rank and its interval."""
    if row.rank is None:
        return ""
    return (
        f"{row.rank}" if row.rank_low == row.rank_high else f"{row.rank} ({row.rank_low} to {row.rank_high})"
    )


def construct_view(row: ConstructRow) -> ConstructView:
    """One construct's numbers, rounded together with their uncertainties."""
    ratio = ""
    if (
        row.charge_ratio is not None
        and row.charge_ratio_low is not None
        and row.charge_ratio_high is not None
    ):
        ratio = f"{row.charge_ratio:.3f} ({row.charge_ratio_low:.3f} to {row.charge_ratio_high:.3f})"
    return ConstructView(
        row=row,
        median=typeset(with_uncertainty(row.median_mv, row.median_uncertainty_mv)),
        charge=typeset(with_uncertainty(row.charge_e0, row.charge_sem_e0)),
        energy=typeset(with_uncertainty(row.energy, row.std_uncertainty)),
        interval=typeset(span((row.low, row.high), row.std_uncertainty)),
        ratio=ratio,
    )


def cell_views(result: Result) -> list[CellView]:
    """Every cell, used or not, in the order of the table."""
    strips = Strips(result)
    return [
        CellView(
            row=cell,
            median=typeset(number(cell.median_mv, 1)),
            midpoint=typeset(number(cell.midpoint_mv, 1)),
            plain_median=typeset(number(cell.plain_median_mv, 1)),
            plateaus=_plateaus(cell),
            strip=Markup(strips.of_cell(cell)),
        )
        for cell in result.cells
    ]


class CycleViews:
    """Forms the views of a result's cycles.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    with_figures : bool
        Whether each cycle gets its figures.
    """

    def __init__(self, result: Result, *, with_figures: bool) -> None:
        self._result = result
        self._constructs = {row.construct: construct_view(row) for row in result.constructs}
        self._figures = CycleFigures(result) if with_figures else None
        self._strips = Strips(result)
        self._backgrounds = grouped((row.cycle, row) for row in result.backgrounds)
        self._of_construct = grouped((flag.construct, flag) for flag in result.flags if flag.construct)
        self._of_cycle = grouped((flag.subject, flag) for flag in result.flags if not flag.construct)

    def all(self) -> list[CycleView]:
        """Every cycle, strongest first."""
        rows = by_strength(self._result.interactions)
        return [self._view(f"cycle-{place}", row) for place, row in enumerate(rows, start=1)]

    def _view(self, anchor: str, row: InteractionRow) -> CycleView:
        return CycleView(
            anchor=anchor,
            row=row,
            value=typeset(with_uncertainty(row.interaction, row.std_uncertainty)),
            interval=typeset(span((row.low, row.high), row.std_uncertainty)),
            rank=rank_words(row),
            p_adjusted=p_words(row.p_adjusted),
            strip=Markup(self._strips.of_cycle(row)),
            corners=tuple(self._constructs[label] for label, _ in row.corners),
            paragraphs=tuple(typeset(text) for text in explain(self._result, row.cycle).split("\n\n")),
            figures=self._drawn(row),
            doubts=tuple(self._doubts(row)),
            facts=tuple(_facts(row)),
            lower_orders=tuple(map(_lower_order, self._backgrounds.get(row.cycle, []))),
        )

    def _drawn(self, row: InteractionRow) -> tuple[tuple[str, Markup], ...]:
        if self._figures is None:
            return ()
        sheets = self._figures.of(row, SINGLE_COLUMN_MM)
        return tuple((FIGURE_TITLES[kind], Markup(svg_inline(sheet))) for kind, sheet in sheets.items())

    def _doubts(self, row: InteractionRow) -> list[Doubt]:
        """Flags of the cycle and of its constructs and cells; those of many cells in one line."""
        flags = [*self._of_cycle.get(row.cycle, [])]
        for label, _ in row.corners:
            flags += self._of_construct.get(label, [])
        return doubts_in_words(flags)


def doubts_in_words(flags: Sequence[Flag]) -> list[Doubt]:
    """One doubt a code and construct; further cells of the same construct are counted."""
    doubts = []
    for (code, _), group in _by_code_and_construct(flags).items():
        first, more = group[0], len(group) - 1
        also = f" ({more} more of its cells too)" if more and first.cell is not None else ""
        doubts.append(Doubt(code=code, subject=first.subject, message=typeset(f"{first.message}{also}")))
    return doubts


def _by_code_and_construct(flags: Sequence[Flag]) -> dict[tuple[str, str], list[Flag]]:
    groups: dict[tuple[str, str], list[Flag]] = {}
    for flag in flags:
        groups.setdefault((flag.code, flag.construct or flag.subject), []).append(flag)
    return groups


def _facts(row: InteractionRow) -> list[tuple[str, str]]:
    """The cycle's numbers that have no column in the table."""
    unit, u = row.energy_unit, row.std_uncertainty
    facts = [
        ("I per channel", f"{with_uncertainty(row.interaction, u)} {unit}"),
        ("interval", span((row.low, row.high), u)),
        ("bootstrap interval", span((row.boot_low, row.boot_high), u)),
        ("Monte Carlo interval", span((row.monte_carlo_low, row.monte_carlo_high), u)),
        ("interval for all cycles at once", span((row.simultaneous_low, row.simultaneous_high), u)),
        ("degrees of freedom", freedom_words(row.dof).replace(" degrees of freedom", "")),
        ("p, p adjusted", ", ".join(filter(None, (p_words(row.p_value), p_words(row.p_adjusted))))),
        ("rank", rank_words(row)),
        (
            "expected of a repetition (shrunken)",
            _shrunken(row),
        ),
        ("native pair", row.opposite_charges or ""),
        ("distance of side chains", distance_words(row)),
        (
            "distance from",
            "" if row.distance_source is None else f"{row.distance_source}: {row.distance_definition}",
        ),
        ("from median voltages alone", _with_unit(number(row.shortcut, decimals_for(u)), unit)),
        (
            "error of that shortcut",
            _limits(row.shortcut_bias, row.shortcut_bias_low, row.shortcut_bias_high, unit),
        ),
        (
            "charge interaction J",
            _limits(row.charge_interaction_e0, row.charge_interaction_low, row.charge_interaction_high, "e0"),
        ),
    ]
    return [(name, typeset(text)) for name, text in facts if text]


def _lower_order(row: BackgroundRow) -> tuple[str, str, str, str]:
    """Interaction of lower order in one background."""
    return (
        "/".join(row.mutations),
        "/".join(row.background) or "wild type",
        typeset(with_uncertainty(row.interaction, row.std_uncertainty)),
        typeset(span((row.low, row.high), row.std_uncertainty)),
    )


def _shrunken(row: InteractionRow) -> str:
    """What to expect of a repetition, or why that is not known."""
    if row.shrunken is None:
        return "" if row.rank is None else f"takes {FEWEST_TO_SHRINK} cycles"
    return _with_unit(number(row.shrunken, decimals_for(row.std_uncertainty)), row.energy_unit)


def _with_unit(text: str, unit: str) -> str:
    return f"{text} {unit}" if text else ""


def _limits(value: float | None, low: float | None, high: float | None, unit: str) -> str:
    """Value and interval to the decimals of the interval's width."""
    if value is None:
        return ""
    if low is None or high is None:
        return f"{number(value, None)} {unit}"
    decimals = decimals_for((high - low) / 4)
    return f"{number(value, decimals)} ({number(low, decimals)} to {number(high, decimals)}) {unit}"
