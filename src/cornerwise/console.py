"""What the commands share: kinds of argument, messages and progress on stderr, folders that are written."""

from __future__ import annotations

import os
import re
import sys
import time
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Mapping
from contextlib import contextmanager
from difflib import get_close_matches
from pathlib import Path
from typing import Annotated

import typer

from .errors import CornerwiseError, DataRefused

_PATIENCE_S = 1.0

CampaignPath = Annotated[Path, typer.Argument(metavar="PATH", help="Campaign folder, or one .xlsx workbook.")]
Json = Annotated[bool, typer.Option("--json", help="Print JSON on stdout instead of a table.")]
Force = Annotated[bool, typer.Option("--force", help="Replace DIR as a whole if it exists.")]


_PARSED = {"float": "a number", "int": "a whole number"}


def reworded(error: typer.BadParameter) -> typer.BadParameter:
    """The same refusal of an option in our own words, where the library that judged it told its kind."""
    judged = getattr(error.__cause__, "errors", None)
    if judged is None:
        return error
    fault = judged()[0]
    found, told, limits = fault["input"], str(fault["msg"]), fault.get("ctx", {})
    kind = str(fault["type"]).partition("_")[0]
    if "is not one of" in told:
        choices = re.findall(r"'([^']*)'", told.partition("is not one of")[2])
        begun = [one for one in choices if found and one.casefold().startswith(str(found).casefold())]
        near = begun or get_close_matches(str(found), choices, n=1)
        hint = f"; did you mean {near[0]}?" if near else ""
        error.message = f"found {found!r}; it takes {', '.join(choices)}{hint}"
    elif kind in _PARSED:
        error.message = f"{found!r} is not {_PARSED[kind]}"
    elif "ge" in limits:
        error.message = f"must be {limits['ge']:g} or more; found {found}"
    return error


def report(error: CornerwiseError) -> None:
    """Say on stderr what went wrong."""
    if isinstance(error, DataRefused):
        from .render.problems import print_problems

        print_problems(error, sys.stderr)
    else:
        print(f"cornerwise: {error}", file=sys.stderr)


@contextmanager
def progress() -> Iterator[Callable[[str, int, int], None]]:
    """Report to stderr once the work has taken longer than a second, and then each further second.

    At a terminal each report takes the place of the one before, and the last one goes when the work ends.
    """
    last = time.monotonic()
    rewriting = sys.stderr.isatty() and os.environ.get("TERM", "dumb") != "dumb"
    clear, end = ("\r\x1b[K", "") if rewriting else ("", "\n")
    shown = False

    def told(step: str, done: int, total: int) -> None:
        nonlocal last, shown
        if time.monotonic() - last >= _PATIENCE_S:
            last, shown = time.monotonic(), True
            print(f"{clear}cornerwise: {step}, {done} of {total}", end=end, file=sys.stderr, flush=True)

    try:
        yield told
    finally:
        if shown and rewriting:
            print(clear, end="", file=sys.stderr, flush=True)


def expect_room(folder: Path | None, *, force: bool) -> None:
    """Refuse a destination before the work is done rather than after."""
    from .folders import check_destination

    if folder is None:
        return
    check_destination(folder, force=force)
    if force:
        from .render.strangers import refuse_strangers

        refuse_strangers(folder)


def write(files: Mapping[str, str | bytes], folder: Path, *, force: bool) -> None:
    """Write files of ``--out`` and say so on stderr."""
    from .folders import write_folder

    write_folder(files, folder, force=force)
    print(f"cornerwise: wrote {_listed(files)} into {folder}", file=sys.stderr)


def _listed(files: Iterable[str]) -> str:
    """Names of files, those in a folder only counted."""
    names = list(files)
    below = Counter(name.partition("/")[0] for name in names if "/" in name)
    return ", ".join(
        [name for name in names if "/" not in name] + [f"{n} files in {d}" for d, n in below.items()]
    )
