"""The report's page: templates filled, style and behaviour inlined, nothing fetched."""

from __future__ import annotations

from jinja2 import Environment
from markupsafe import Markup

from ...result import Result
from ..figures.files import overview_sheets
from ..figures.style import SINGLE_COLUMN_MM
from ..figures.vector import svg_inline
from ..legend import CAUTION, formula, percent, setting_values, sign_sentences, unit_phrase
from ..methods import figure_legends, methods_paragraphs
from ..pages import asset, environment, policy
from ..rounding import typeset
from .answer import answer
from .next_recordings import next_charges, next_views
from .views import FIGURE_TITLES, CycleView, CycleViews, cell_views, construct_view

_PACKAGE = "cornerwise.render.report"
MOST_DRAWN_CYCLES = 60  # beyond it a cycle's figures are left out unless they are asked for
_MOST_IN_ANSWER = 24  # cycles whose figure still fits beside the answer
_OVERVIEW_TITLES = {
    "interactions": "All interactions, strongest first",
    "matrix": "Residue by residue",
    "charges": "Total charge against the wild type",
    "budget": "Where the uncertainty comes from",
}
RESEARCH_ONLY = (
    "For research use; not for clinical variant interpretation. A coupling energy is a difference between "
    "two states and no proof of a contact. Your laboratory's rules and expert review come first."
)


def report_html(result: Result, *, cycle_figures: bool | None = None) -> str:
    """Report of a result as one HTML page.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    cycle_figures : bool, optional
        Whether each cycle has its figures; None for yes up to 60 cycles.

    Returns
    -------
    str
        A whole document that needs no other file and no network; the same text for the same result.
    """
    drawn = len(result.interactions) <= MOST_DRAWN_CYCLES if cycle_figures is None else cycle_figures
    cycles = CycleViews(result, with_figures=drawn).all()
    style, script = asset(_PACKAGE, "style.css"), asset(_PACKAGE, "behaviour.js")
    paragraphs, references = methods_paragraphs(result)
    overview = _overview(result)
    few = len(result.interactions) <= _MOST_IN_ANSWER
    first = next((sheets[0] for kind, _, sheets in overview if few and kind == "interactions"), None)
    return (
        _templates()
        .get_template("report.html")
        .render(
            result=result,
            settings=result.settings,
            title=result.settings.title or "Interaction energies",
            answer=answer(result, cycles),
            cycles=cycles,
            next_steps=next_views(result, cycles),
            next_charges=next_charges(cycles),
            drawn=drawn,
            first_figure=first,
            overview=[one for one in overview if first is None or one[0] != "interactions"],
            constructs=[construct_view(row) for row in result.constructs],
            cells=cell_views(result),
            methods=[typeset(text) for text in paragraphs],
            references=references,
            legends=_legends(result, overview, cycles),
            setting_values=setting_values(result.settings),
            level=percent(result.settings.confidence),
            unit=unit_phrase(result.settings),
            formula=formula(result.settings.reference_voltage_mv),
            signs=sign_sentences({row.order for row in result.interactions}),
            caution=CAUTION,
            research_only=RESEARCH_ONLY,
            style=Markup(style),
            script=Markup(script),
            policy=policy(style, script),
        )
    )


def _legends(
    result: Result, overview: list[tuple[str, str, list[Markup]]], cycles: list[CycleView]
) -> list[tuple[str, str]]:
    """Legends of the figures there are; where cycles are not drawn, those their figures would have."""
    drawn = {kind for kind, _, _ in overview} | {
        kind for one in cycles for kind, title in FIGURE_TITLES.items() if title in dict(one.figures)
    }
    of_cycles = set() if any(one.figures for one in cycles) else set(FIGURE_TITLES)
    return [
        (kind, typeset(text)) for kind, text in figure_legends(result).items() if kind in drawn | of_cycles
    ]


def _templates() -> Environment:
    templates = environment(_PACKAGE)
    templates.filters["typeset"] = typeset
    return templates


def _overview(result: Result) -> list[tuple[str, str, list[Markup]]]:
    """Kind, title and drawings of the figures of the whole campaign."""
    return [
        (kind, _OVERVIEW_TITLES[kind], [Markup(svg_inline(sheet)) for sheet in sheets])
        for kind, sheets in overview_sheets(result, SINGLE_COLUMN_MM).items()
        if sheets
    ]
