"""The command ``plan``: its options, and the one public function they call."""

from __future__ import annotations

import sys
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal, TypedDict

import typer

from .console import Force, Json, expect_room, progress, write
from .errors import UsageError
from .process import print_json

if TYPE_CHECKING:
    from .planning.plan import Plan
    from .planning.request import PlanRequest


def _numbers(text: str | None, words: str) -> tuple[float, ...]:
    """Numbers separated by commas."""
    if text is None:
        return ()
    try:
        return tuple(float(part) for part in text.split(","))
    except ValueError:
        raise UsageError(f"{words} takes numbers separated by commas; found {text!r}") from None


def _whole(text: str | None) -> tuple[int, ...]:
    numbers = _numbers(text, "--cells")
    if any(number != round(number) for number in numbers):
        raise UsageError(f"--cells takes whole numbers separated by commas; found {text!r}")
    return tuple(map(round, numbers))


_Pilot = Annotated[
    Path | None, typer.Argument(metavar="PATH", help="Pilot campaign; without it, scatters are assumed.")
]
_Cells = Annotated[str | None, typer.Option(metavar="N,N,...", help="Cells of each kind to tell of.")]
_HalfWidth = Annotated[float | None, typer.Option(metavar="E", help="Wanted half-width of the interval.")]
_Power = Annotated[float | None, typer.Option(metavar="P", help="Wanted power, 0 to 1; else 0.8.")]
_Interaction = Annotated[
    float | None, typer.Option(metavar="E", help="True interaction for the power; else the threshold.")
]
_Verdict = Annotated[
    Literal["equal", "changed"] | None, typer.Option(help="Wanted verdict on every mutant's total charge.")
]
_Ratio = Annotated[float | None, typer.Option(metavar="R", help="True ratio of charges; else as observed.")]
_Recordings = Annotated[int | None, typer.Option(metavar="N", help="Further recordings to split.")]
_Criterion = Annotated[Literal["mean", "largest"], typer.Option(help="Half-width the split makes small.")]
_Anew = Annotated[bool, typer.Option("--anew", help="Use the pilot's scatters only, not its cells.")]
_Cycles = Annotated[
    list[str] | None, typer.Option(metavar="CYCLE", help="Plan for this cycle; may be given again.")
]
_Median = Annotated[str | None, typer.Option(metavar="MV[,...]", help="Assumed median voltage.")]
_MedianSd = Annotated[str | None, typer.Option(metavar="MV[,...]", help="Its scatter between cells.")]
_Charge = Annotated[str | None, typer.Option(metavar="E0[,...]", help="Assumed total charge per channel.")]
_ChargeSd = Annotated[str | None, typer.Option(metavar="E0[,...]", help="Its scatter between cells.")]
_Charges = Annotated[
    Literal["separate", "paired", "shared", "stated"],
    typer.Option(help="Charges from other cells, the same cells, the wild type's for all, or a stated one."),
]
_ChargeSem = Annotated[float, typer.Option(metavar="E0", help="Standard uncertainty of a stated charge.")]
_Correlation = Annotated[float, typer.Option(metavar="R", help="Of charge and median in paired cells.")]
_Order = Annotated[int, typer.Option(metavar="N", help="Mutations of a cycle.")]
_Pairs = Annotated[int, typer.Option(metavar="N", help="Cycles on one wild type.")]
_KnownFrom = Annotated[
    int | None, typer.Option(metavar="N", help="Cells the assumed scatters are known from.")
]
_Celsius = Annotated[float, typer.Option(metavar="C", help="Temperature.")]
_Unit = Annotated[Literal["kcal/mol", "kJ/mol", "kT", "meV"], typer.Option(help="Energy unit.")]
_Confidence = Annotated[float, typer.Option(metavar="P", help="Of the intervals.")]
_Out = Annotated[Path | None, typer.Option(metavar="DIR", help="Write tables and a figure into DIR.")]


def plan(  # noqa: PLR0913 - every option of the command is a parameter
    path: _Pilot = None,
    cells: _Cells = None,
    half_width: _HalfWidth = None,
    power: _Power = None,
    interaction: _Interaction = None,
    charge_verdict: _Verdict = None,
    ratio: _Ratio = None,
    recordings: _Recordings = None,
    criterion: _Criterion = "mean",
    anew: _Anew = False,
    cycle: _Cycles = None,
    median: _Median = None,
    median_sd: _MedianSd = None,
    charge: _Charge = None,
    charge_sd: _ChargeSd = None,
    charges: _Charges = "separate",
    charge_sem: _ChargeSem = 0.0,
    correlation: _Correlation = 0.0,
    order: _Order = 2,
    pairs: _Pairs = 1,
    known_from: _KnownFrom = None,
    temperature: _Celsius = 22.0,
    unit: _Unit = "kcal/mol",
    confidence: _Confidence = 0.95,
    out: _Out = None,
    force: Force = False,
    as_json: Json = False,
) -> None:
    """Plan the next recordings.

    What half-width and power to expect of more cells, how few further cells reach a goal and of which kind
    on which constructs, and the best split of a number of recordings over all cycles at once. Options from
    --median on describe constructs yet to be recorded: one number for all corners, or one a corner (wild
    type, singles, double).

    \b
    For example:
      cornerwise plan trial
      cornerwise plan trial --half-width 0.5 --recordings 40
      cornerwise plan trial --charge-verdict equal
      cornerwise plan --median -40 --median-sd 2.5 --charge 13 --charge-sd 0.6
    """  # noqa: D301
    from .planning.request import PlanRequest

    expect_room(out, force=force)
    request = PlanRequest(
        cells=_whole(cells),
        drawn=out is not None,
        half_width=half_width,
        power=power,
        interaction=interaction,
        charge_verdict=charge_verdict,
        charge_ratio=ratio,
        recordings=recordings,
        criterion=criterion,
        anew=anew,
        cycles=tuple(cycle or ()),
    )
    constructs = {
        "median": _numbers(median, "--median"),
        "median_sd": _numbers(median_sd, "--median-sd"),
        "charge": _numbers(charge, "--charge"),
        "charge_sd": _numbers(charge_sd, "--charge-sd"),
    }
    if path is not None:
        found = _of_pilot(path, request, constructs)
    else:
        from .planning.assumed import Assumptions
        from .planning.plan import plan_assumed

        assumed = Assumptions(
            **_described(constructs),
            charges=charges,
            charge_sem_e0=charge_sem,
            correlation=correlation,
            order=order,
            pairs=pairs,
            known_from=known_from,
            temperature_c=temperature,
            energy_unit=unit,
        )
        found = plan_assumed(assumed, request, confidence=confidence)
    _show(found, out, force=force, as_json=as_json)


class _Described(TypedDict):
    median_mv: tuple[float, ...]
    median_sd_mv: tuple[float, ...]
    charge_e0: tuple[float, ...]
    charge_sd_e0: tuple[float, ...]


def _described(constructs: Mapping[str, tuple[float, ...]]) -> _Described:
    """What must be known of constructs that are yet to be recorded."""
    missing = [
        f"--{name.replace('_', '-')}" for name in ("median", "median_sd", "charge") if not constructs[name]
    ]
    if missing:
        raise UsageError(f"give a pilot campaign, or assume constructs with {', '.join(missing)}")
    return {
        "median_mv": constructs["median"],
        "median_sd_mv": constructs["median_sd"],
        "charge_e0": constructs["charge"],
        "charge_sd_e0": constructs["charge_sd"] or (0.0,),
    }


def _of_pilot(path: Path, request: PlanRequest, constructs: Mapping[str, tuple[float, ...]]) -> Plan:
    from . import plan as run
    from . import read

    given = [f"--{name.replace('_', '-')}" for name, values in constructs.items() if values]
    if given:
        raise UsageError(f"{given[0]} is for constructs yet to be recorded; leave out {path} or the option")
    with progress() as told:
        return run(read(path), request, told)


def _show(found: Plan, out: Path | None, *, force: bool, as_json: bool) -> None:
    from .render.machine import plan_json
    from .render.planning import print_plan

    if out is not None:  # before the table is printed: the reader of a pipe may go away
        from .render.plan_files import plan_files

        write(plan_files(found), out, force=force)
    if as_json:
        print_json(plan_json(found))
    else:
        print_plan(found, sys.stdout)
