"""What another program reads on stdout."""

from __future__ import annotations

import dataclasses
import json

from ..planning.plan import Plan
from ..protocols import ProtocolCheck
from ..result import Result
from ..simulation import Truth
from ..surveying import Survey

SURVEY_SCHEMA = "cornerwise-survey/1"
TRUTH_SCHEMA = "cornerwise-truth/1"
PROTOCOLS_SCHEMA = "cornerwise-protocols/1"
RANKING_SCHEMA = "cornerwise-ranking/1"
PLAN_SCHEMA = "cornerwise-plan/1"


def survey_json(found: Survey) -> str:
    """Text of a survey as JSON, full precision."""
    document = {
        "schema": SURVEY_SCHEMA,
        "settings": dataclasses.asdict(found.settings),
        "background": found.background,
        "constructs": [dataclasses.asdict(row) for row in found.constructs],
        "cells": [dataclasses.asdict(row) for row in found.cells],
        "cycles": found.cycles,
        "incomplete": [{"construct": label, "lacks": missing} for label, missing in found.incomplete],
        "flags": [dataclasses.asdict(flag) for flag in found.flags],
        "notes": found.notes,
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def protocols_json(found: ProtocolCheck) -> str:
    """Text of a check of voltage protocols as JSON, full precision."""
    document = {
        "schema": PROTOCOLS_SCHEMA,
        "question": dataclasses.asdict(found.question),
        "curves": list(found.curves),
        "protocols": [dataclasses.asdict(row) for row in found.rows],
        "advised": None if found.advised is None else dataclasses.asdict(found.advised),
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def truth_json(truth: Truth) -> str:
    """Text of what is true of a simulated campaign as JSON, full precision."""
    document = {
        "schema": TRUTH_SCHEMA,
        "constructs": [dataclasses.asdict(row) for row in truth.constructs],
        "cycles": [dataclasses.asdict(row) for row in truth.cycles],
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def ranking_json(result: Result) -> str:
    """Text of a ranking as JSON, full precision."""
    document = {
        "schema": RANKING_SCHEMA,
        "settings": dataclasses.asdict(result.settings),
        "ranking": [dataclasses.asdict(row) for row in result.ranking],
        "notes": result.notes,
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def plan_json(plan: Plan) -> str:
    """Text of a plan as JSON, full precision."""
    document = {
        "schema": PLAN_SCHEMA,
        "title": plan.title,
        "energy_unit": plan.energy_unit,
        "confidence": plan.confidence,
        "true_interaction": plan.true_interaction,
        "request": dataclasses.asdict(plan.request),
        "outlooks": [dataclasses.asdict(row) for row in plan.outlooks],
        "needs": [dataclasses.asdict(row) for row in plan.needs],
        "splits": [dataclasses.asdict(row) for row in plan.splits],
        "split": None if plan.split is None else dataclasses.asdict(plan.split),
        "notes": plan.notes,
    }
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"
