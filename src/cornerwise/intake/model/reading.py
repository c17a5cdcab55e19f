"""From a path to the model that a campaign is drawn from."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from ... import plausible
from ...campaign import Settings
from ...errors import DataRefused, Origin
from ...mutations import Mutations, parse_label
from ...simulation.model import Model
from ...simulation.schemes import changed_steps
from ..files import read_bytes
from ..findings import Findings, shown
from ..rules import say
from ..settings import KEYS as CAMPAIGN_KEYS
from ..settings import Document, read_settings
from ..toml_file import read_toml
from .effects import read_cycles, read_interactions, read_mutations
from .gating import mev_per_unit, read_gating
from .keys import KEYS, SECTIONS, TOP_RULES
from .parts import Part
from .recordings import read_recordings


def read_model(path: str | os.PathLike[str]) -> Model:
    """Read and check a model file.

    Parameters
    ----------
    path : str or path-like
        A TOML file; ``docs/simulate.md`` describes its keys.

    Returns
    -------
    Model
        What `cornerwise.simulate` draws a campaign from.

    Raises
    ------
    DataRefused
        If anything is wrong, with every problem found: line, key, what stands there, what should stand
        there, and the way out.
    """
    findings = Findings()
    model = _model(Path(path), findings)
    if findings or model is None:
        raise DataRefused(findings.in_order())
    return model


def _model(path: Path, findings: Findings) -> Model | None:
    contents = read_bytes(path, findings)
    document = None if contents is None else read_toml(contents[0], path.name, findings)
    if contents is None or document is None:
        return None
    document = document.as_meant((*KEYS[""], *SECTIONS), findings)
    campaign, settings = _campaign(document, findings)
    top = Part(document=document, path=(), values=document.values)
    gating = read_gating(document, settings, findings)
    mev = mev_per_unit(settings)
    mutated, singles = read_mutations(document, gating, mev, findings)
    interactions = read_interactions(document, gating, mutated, mev, findings)
    cycles = read_cycles(top, mutated, findings)
    model = Model(
        **top.read(TOP_RULES, findings), settings=settings, campaign=campaign, order=gating.order,
        steps=gating.steps, couplings=gating.couplings, sides=gating.sides, opening=gating.opening,
        mutations=mutated.mutations, effects=(*singles, *interactions), cycles=cycles,
        source=contents[0],
    )  # fmt: skip
    whole = mutated.whole and 0 < len(cycles) == len(_listed(top))
    labels = model.genotypes if whole else {}
    recording, common, own = read_recordings(document, labels, findings)
    model = replace(model, recording=recording, common=common, own_recordings=own)
    if not findings:
        _check_charges(model, document, findings)
    return model


def _listed(top: Part) -> Sequence[object]:
    """Cycles as they stand in the file, sound or not."""
    cycles = top.values.get("cycles")
    return cycles if isinstance(cycles, list) else ()


def _campaign(document: Document, findings: Findings) -> tuple[Mapping[str, object], Settings]:
    """The keys of the campaign that is made, and the settings they come to."""
    values = document.values.get("campaign")
    if not isinstance(values, Mapping):
        findings.add(
            document.origin("campaign"),
            found="no campaign" if values is None else say(values),
            expected="a table [campaign] that names at least the wild type",
            remedy='add the lines [campaign] and wild_type = "WT"',
        )
        return {}, Settings(wild_type="WT")
    inside = {path: place for path, place in document.rows.items() if path[0] == "campaign"}
    rows = {path[1:]: place for path, place in inside.items() if path[1:]}
    own = Document(values=values, file=document.file, rows=rows).as_meant(CAMPAIGN_KEYS, findings)
    settings = read_settings(own, findings) or Settings(wild_type="WT")
    if parse_label(settings.wild_type) is not None:
        findings.add(
            own.origin("wild_type"), found=f"the label {shown(settings.wild_type)}, which spells mutations",
            expected="a wild type without mutations", remedy='call it "WT"',
        )  # fmt: skip
    return own.values, settings


def _check_charges(model: Model, document: Document, findings: Findings) -> None:
    """Every construct has a possible charge, and the wild type's is measured where it is needed."""
    refused: list[Mutations] = []
    for label, mutations in model.genotypes.items():
        if any(fewer <= mutations for fewer in refused):
            continue
        steps = changed_steps(model.steps, model.effects_on(mutations))
        total = sum(step.copies * step.charge_e0 for step in steps)
        if min(step.charge_e0 for step in steps) < 0 or not plausible.possible_total_charge(total):
            refused.append(mutations)
            told = ", ".join(f"{step.name} {step.charge_e0:.4g}" for step in steps)
            findings.add(
                Origin(file=document.file, column="mutation"),
                found=f"charges in e0 of {label}: {told}, in all {total:.4g}",
                expected=f"none below 0, and above 0 and at most {plausible.CHARGE_LIMIT_E0:g} in all",
                remedy="correct charge_e0 or step_charges_e0 of its mutations",
            )
    wild_type = model.recording_of(model.settings.wild_type)
    measured = wild_type.charge_cells or wild_type.opening_cells
    if not measured and isinstance(model.settings.charge, str):
        findings.add(
            document.origin("recording", "charge_cells"), found="no charge of the wild type",
            expected="its total charge, which the energies need",
            remedy="give it charge_cells, or state one for all: charge = { value_e0 = 13.0, sem_e0 = 0.5 } "
            "under [campaign]",
        )  # fmt: skip
