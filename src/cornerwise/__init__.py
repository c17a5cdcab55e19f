"""Interaction energies from charge-voltage data and double-mutant cycles.

``read`` turns a campaign folder or workbook into a `Campaign`, ``couple`` computes the interaction energy
of every cycle with its uncertainty, ``survey`` judges the data without computing an energy. ``read_model``
reads a gating model, ``simulate`` draws a campaign from it and ``truth_of`` says what is true of that.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .campaign import Campaign
    from .coupling import couple
    from .errors import CornerwiseError, DataRefused, UsageError
    from .intake import read
    from .intake.model import read_model
    from .render.explanation import explain
    from .result import Result
    from .simulation import simulate, truth_of
    from .surveying import Survey, survey

__all__ = [
    "Campaign",
    "CornerwiseError",
    "DataRefused",
    "Result",
    "Survey",
    "UsageError",
    "couple",
    "explain",
    "read",
    "read_model",
    "simulate",
    "survey",
    "truth_of",
]

_ROOM_OF = {
    "Campaign": "campaign",
    "CornerwiseError": "errors",
    "DataRefused": "errors",
    "Result": "result",
    "Survey": "surveying",
    "UsageError": "errors",
    "couple": "coupling",
    "explain": "render.explanation",
    "read": "intake",
    "read_model": "intake.model",
    "simulate": "simulation",
    "survey": "surveying",
    "truth_of": "simulation",
}


def __getattr__(name: str) -> object:
    """Fetch a public name from its room when it is first used, so that importing costs nothing."""
    if name in _ROOM_OF:
        return getattr(import_module(f".{_ROOM_OF[name]}", __name__), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
