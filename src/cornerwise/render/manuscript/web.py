"""A table as one HTML page that fetches nothing."""

from __future__ import annotations

from markupsafe import Markup, escape

from ..pages import asset, environment, policy
from .document import ManuscriptTable
from .words import Words, plain

_PACKAGE = "cornerwise.render.manuscript"
_SHORT = 24  # letters of a text that stays on one line
_ELEMENTS = {"plain": "", "italic": "i", "bold": "b", "subscript": "sub", "superscript": "sup"}


def html_text(table: ManuscriptTable) -> str:
    """A whole page with one table, its caption and its footnotes; labels are only text."""
    style = asset(_PACKAGE, "table.css")
    templates = environment(_PACKAGE)
    templates.filters["inked"] = _inked
    return templates.get_template("table.html").render(
        table=table, title=plain(table.title), style=Markup(style), policy=policy(style), short=_SHORT
    )


def _inked(runs: Words) -> Markup:
    pieces = []
    for run in runs:
        element, text = _ELEMENTS[run.face], escape(run.text)
        pieces.append(Markup(f"<{element}>{text}</{element}>") if element else text)
    return Markup("").join(pieces)
