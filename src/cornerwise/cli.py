"""The command line: each command reads, calls one public function, renders and exits."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Annotated

import typer
from typer.core import TyperGroup

from .console import CampaignPath, Force, Json, expect_room, progress, report, reworded, write
from .design_commands import protocol, simulate
from .errors import CornerwiseError, UsageError
from .plan_command import plan
from .process import let_go_of_stdout, print_json, run


class _Boundary(TyperGroup):
    """The one place where an error becomes a message and an exit code."""

    def invoke(self, ctx: object) -> object:
        try:
            return super().invoke(ctx)  # type: ignore[arg-type]
        except CornerwiseError as error:
            report(error)
            raise SystemExit(error.exit_code) from None
        except typer.BadParameter as error:
            raise reworded(error) from None
        except BrokenPipeError:  # the reader of a pipe went away; nothing is wrong
            let_go_of_stdout()
            raise SystemExit(0) from None


app = typer.Typer(
    cls=_Boundary,
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
    context_settings={"help_option_names": ["-h", "--help"]},
)


def _version(asked: bool) -> None:
    if asked:
        from importlib.metadata import version

        print(f"cornerwise {version('cornerwise')}")
        raise typer.Exit


@app.callback()
def _cornerwise(
    _: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Print the version and exit.")
    ] = False,
) -> None:
    """Interaction energies from charge-voltage data and double-mutant cycles.

    \b
    For example:
      cornerwise new trial                    a filled-in campaign to start from
      cornerwise check trial                  read and judge the data
      cornerwise couple trial --out results   the coupling table and its files
      cornerwise plan trial                   what to record next
      cornerwise simulate m.toml --out drawn  a campaign with a known truth

    \b
    Exit codes: 0 done, 1 a fault of the program, 2 a wrong call,
    3 the data were refused, 130 or 143 stopped by a signal.
    """  # noqa: D301 - the \b keeps the lines below it as they are


@app.command()
def new(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="New or empty folder.")],
) -> None:
    """Write a small invented campaign to overwrite with your own.

    \b
    For example:
      cornerwise new trial && cornerwise couple trial
    """  # noqa: D301
    from .starter import new_campaign

    for name in new_campaign(folder):
        print(folder / name)


app.command()(simulate)
app.command()(protocol)


@app.command()
def check(
    path: CampaignPath,
    figures: Annotated[
        Path | None,
        typer.Option(metavar="DIR", help="Draw every construct's curves, SVG, PDF and PNG, into DIR."),
    ] = None,
    force: Force = False,
    as_json: Json = False,
) -> None:
    """Read and judge the data; compute no energy.

    \b
    For example:
      cornerwise check trial
      cornerwise check trial --figures look
      cornerwise check trial.xlsx --json
    """  # noqa: D301
    from . import read, survey
    from .render.machine import survey_json
    from .render.terminal import print_survey

    expect_room(figures, force=force)
    with progress() as told:
        found = survey(read(path), told)
    if figures is not None:  # before the table is printed: the reader of a pipe may go away
        from .render.figures.files import curve_files

        write(curve_files(found), figures, force=force)
    if as_json:
        print_json(survey_json(found))
    else:
        print_survey(found, sys.stdout)


@app.command()
def couple(
    path: CampaignPath,
    out: Annotated[
        Path | None,
        typer.Option(metavar="DIR", help="Write result.json and everything made of it into DIR."),
    ] = None,
    figures: Annotated[
        bool, typer.Option("--figures", help="With --out: draw all figures too, SVG, PDF and PNG.")
    ] = False,
    force: Force = False,
    as_json: Json = False,
) -> None:
    """Compute the interaction energies of all cycles.

    Prints the coupling table; with --out also writes result.json, the CSV tables, a report in one HTML
    file and tables for a manuscript, and with --figures the figures at journal widths.

    \b
    For example:
      cornerwise couple trial
      cornerwise couple trial --out results --figures --force
      cornerwise couple trial.xlsx --json > result.json
    """  # noqa: D301
    from . import couple as run
    from . import output_files, read
    from .render.terminal import print_result

    if figures and out is None:
        raise UsageError("--figures needs a folder to draw into; give --out DIR")
    expect_room(out, force=force)
    with progress() as told:
        result = run(read(path), told)
    if out is not None:  # before the table is printed: the reader of a pipe may go away
        with progress() as told:
            files = output_files(result, figures=figures, progress=told)
        write(files, out, force=force)
    if as_json:
        print_json(result.to_json())
    else:
        print_result(result, sys.stdout)


@app.command()
def render(  # noqa: PLR0913 - one parameter an option
    path: Annotated[
        Path, typer.Argument(metavar="RESULT.json", help="What couple wrote; - for standard input.")
    ],
    out: Annotated[Path, typer.Option(metavar="DIR", help="Folder to write into.")],
    unit: Annotated[
        str | None, typer.Option(metavar="UNIT", help="Energies in kcal/mol, kJ/mol, kT or meV.")
    ] = None,
    columns: Annotated[
        str, typer.Option(metavar="A,B,C", help="Columns of the coupling table, in this order.")
    ] = "",
    construct_columns: Annotated[
        str, typer.Option(metavar="A,B,C", help="Columns of the construct table, in this order.")
    ] = "",
    group: Annotated[
        str, typer.Option(metavar="HOW", help="Group the rows of the tables: none, pair or construct.")
    ] = "none",
    digits: Annotated[
        str, typer.Option(metavar="HOW", help="Digits of an uncertainty: two, or one-or-two.")
    ] = "two",
    figures: Annotated[
        bool, typer.Option("--figures", help="Draw all figures too, SVG, PDF and PNG.")
    ] = False,
    force: Force = False,
) -> None:
    """Write again what couple --out wrote, without computing.

    Takes other columns, groups, digits or units for the tables; result.json stays as it was computed.

    \b
    For example:
      cornerwise render results/result.json --out again
      cornerwise render results/result.json --out si --unit kJ/mol
      cornerwise render results/result.json --out si --columns cycle,interaction
      cornerwise couple trial --json | cornerwise render - --out again
    """  # noqa: D301
    from . import TableOptions, output_files, read_result

    expect_room(out, force=force)
    options = TableOptions(
        columns=_named(columns), construct_columns=_named(construct_columns), group=group, digits=digits
    )
    with progress() as told:
        files = output_files(read_result(path), tables=options, unit=unit, figures=figures, progress=told)
    write(files, out, force=force)


def _named(columns: str) -> list[str]:
    if ";" in columns:
        raise UsageError(f"join the columns by commas; found {columns!r}")
    return [name.strip() for name in columns.split(",") if name.strip()]


@app.command()
def rank(
    path: CampaignPath,
    by_lower_limit: Annotated[
        bool,
        typer.Option("--by-lower-limit", help="Order by the lower limit of the size, not by the estimate."),
    ] = False,
    first: Annotated[
        int | None,
        typer.Option(min=1, metavar="K", help="Give the probability of being among the first K."),
    ] = None,
    as_json: Json = False,
) -> None:
    """Rank the cycles by strength, with the ranks the data allow.

    \b
    For example:
      cornerwise rank trial
      cornerwise rank trial --by-lower-limit --first 5
    """  # noqa: D301
    from . import couple as run
    from . import read
    from .campaign import ranked_by
    from .render.machine import ranking_json
    from .render.ranking import print_ranking

    with progress() as told:
        result = run(ranked_by(read(path), lower_limit=by_lower_limit, first=first), told)
    if as_json:
        print_json(ranking_json(result))
    else:
        print_ranking(result, sys.stdout)


app.command()(plan)


@app.command()
def explain(
    path: CampaignPath,
    cycle: Annotated[str, typer.Argument(metavar="CYCLE", help="Name of a cycle in the coupling table.")],
) -> None:
    """Say in words how one cycle was judged.

    What was measured, what was assumed, why these verdicts, and what would change them.

    \b
    For example:
      cornerwise explain trial D171N/K232Q
    """  # noqa: D301
    from . import couple as run
    from . import explain as put_in_words
    from . import read
    from .render.terminal import print_paragraphs

    with progress() as told:
        result = run(read(path), told)
    print_paragraphs(put_in_words(result, cycle), sys.stdout)


def main() -> None:
    """Entry point of the ``cornerwise`` command."""
    run(_app)


def _app() -> None:
    try:
        app()
    except Exception:  # whatever is left is no message for the user but a fault of ours
        import traceback

        traceback.print_exc()
        print("cornerwise: this is a fault of the program, please report it", file=sys.stderr)
        raise SystemExit(CornerwiseError.exit_code) from None
