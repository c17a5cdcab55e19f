"""Commands for what is still to be recorded: a campaign with a known truth, a voltage protocol."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Annotated

import typer

from .console import Force, Json, expect_room, progress, write
from .errors import UsageError
from .process import print_json


def simulate(
    model_file: Annotated[Path, typer.Argument(metavar="MODEL.toml", help="Model file.")],
    out: Annotated[Path, typer.Option(metavar="DIR", help="Write the campaign into DIR.")],
    force: Force = False,
    as_json: Json = False,
) -> None:
    """Draw a campaign with a known truth from a gating model.

    Prints what is true; DIR gets the campaign and, in the folder truth, the model and the true values.

    \b
    For example:
      cornerwise simulate model.toml --out trial
      cornerwise couple trial
    """  # noqa: D301
    from . import read_model, truth_of
    from . import simulate as draw
    from .render.machine import truth_json
    from .render.simulated import campaign_files
    from .render.truth import print_truth

    expect_room(out, force=force)
    model = read_model(model_file)
    truth = truth_of(model)
    write(campaign_files(draw(model), truth, model), out, force=force)
    if as_json:
        print_json(truth_json(truth))
    else:
        print_truth(truth, sys.stdout)


def protocol(
    model_file: Annotated[
        Path | None, typer.Argument(metavar="MODEL.toml", help="Model whose constructs are expected.")
    ] = None,
    curve: Annotated[
        list[str] | None,
        typer.Option(metavar="MEDIAN:SLOPE", help="Instead: median and slope in mV; may be repeated."),
    ] = None,
    bound: Annotated[
        float | None,
        typer.Option(metavar="MV", min=0.01, help="Largest bias of a median in mV; 1 by default."),
    ] = None,
    share: Annotated[
        float | None,
        typer.Option(
            metavar="F", min=1e-4, max=0.2, help="Largest part of the charge beyond an end; 0.02 by default."
        ),
    ] = None,
    noise: Annotated[
        float | None,
        typer.Option(
            metavar="F", min=0.0, max=0.5, help="Of a point, part of the charge; the model's, or 0.01."
        ),
    ] = None,
    step: Annotated[
        list[float] | None, typer.Option(metavar="MV", help="Step in mV; may be repeated.")
    ] = None,
    ends: Annotated[
        tuple[float, float] | None,
        typer.Option("--range", metavar="FIRST LAST", help="A range in mV to judge as well; the model's."),
    ] = None,
    as_json: Json = False,
) -> None:
    """Try which voltage range and step leave median voltages unbiased.

    Slope: the voltage over which the foot of a two-state curve grows e-fold, kT over its charge.

    \b
    For example:
      cornerwise protocol --curve -40:8 --curve -15:12 --range -140 80
      cornerwise protocol model.toml --bound 0.5
    """  # noqa: D301
    from . import read_model
    from .protocols import check_protocols, curves_of, expected_curves, median_and_slope, question_for
    from .render.machine import protocols_json
    from .render.protocols import print_protocols

    if (model_file is None) == (curve is None):
        raise UsageError("give either a model file or --curve MEDIAN:SLOPE")
    model = None if model_file is None else read_model(model_file)
    asked = question_for(model, bound_mv=bound, share=share, noise=noise, steps_mv=step, ends_mv=ends)
    pairs = [median_and_slope(words) for words in curve or ()]
    curves = expected_curves(pairs) if model is None else curves_of(model)
    with progress() as told:
        found = check_protocols(curves, asked, told)
    if as_json:
        print_json(protocols_json(found))
    else:
        print_protocols(found, sys.stdout)
