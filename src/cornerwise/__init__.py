"""Interaction energies from charge-voltage data and double-mutant cycles.

``read`` turns a campaign folder or workbook into a `Campaign`, ``couple`` computes the interaction energy
of every cycle with its uncertainty, ``survey`` judges the data without computing an energy. ``read_model``
reads a gating model, ``simulate`` draws a campaign from it and ``truth_of`` says what is true of that.
``output_files`` gives the files of a result, ``read_result`` a result from its ``result.json``.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .campaign import Campaign
    from .coupling import couple
    from .errors import CornerwiseError, DataRefused, UsageError
    from .formats import schemas
    from .intake import read
    from .intake.model import read_model
    from .planning.assumed import Assumptions
    from .planning.plan import Plan, plan, plan_assumed
    from .planning.request import PlanRequest
    from .render.explanation import explain
    from .render.files import output_files
    from .render.manuscript.options import TableOptions
    from .result import Result
    from .result_reading import read_result
    from .simulation import simulate, truth_of
    from .surveying import Survey, survey
    from .unit_change import in_unit

__all__ = [
    "Assumptions",
    "Campaign",
    "CornerwiseError",
    "DataRefused",
    "Plan",
    "PlanRequest",
    "Result",
    "Survey",
    "TableOptions",
    "UsageError",
    "couple",
    "explain",
    "in_unit",
    "output_files",
    "plan",
    "plan_assumed",
    "read",
    "read_model",
    "read_result",
    "schemas",
    "simulate",
    "survey",
    "truth_of",
    "write_folder",
]

_ROOM_OF = {
    "Assumptions": "planning.assumed",
    "Campaign": "campaign",
    "CornerwiseError": "errors",
    "DataRefused": "errors",
    "Plan": "planning.plan",
    "PlanRequest": "planning.request",
    "Result": "result",
    "Survey": "surveying",
    "TableOptions": "render.manuscript.options",
    "UsageError": "errors",
    "couple": "coupling",
    "explain": "render.explanation",
    "in_unit": "unit_change",
    "output_files": "render.files",
    "plan": "planning.plan",
    "plan_assumed": "planning.plan",
    "read": "intake",
    "read_model": "intake.model",
    "read_result": "result_reading",
    "schemas": "formats",
    "simulate": "simulation",
    "survey": "surveying",
    "truth_of": "simulation",
    "write_folder": "folders",
}


def __getattr__(name: str) -> object:
    """Fetch a public name from its room when it is first used, so that importing costs nothing."""
    if name in _ROOM_OF:
        return getattr(import_module(f".{_ROOM_OF[name]}", __name__), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
