"""What a person reads at a terminal or through a pipe."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import IO

from rich.console import Console
from rich.table import Column
from rich.table import Table as Grid
from rich.text import Text

from ..campaign import Settings
from ..flags import Flag
from ..mutations import lacking
from ..result import Result
from ..surveying import Survey, SurveyRow
from .legend import (
    CAUTION,
    budget_sentence,
    formula,
    interval_words,
    settings_sentences,
    sign_sentences,
    unit_phrase,
)
from .ordering import by_strength, flag_marks
from .rounding import span, with_uncertainty

_VERDICT_STYLE = {
    "coupled": "bold",
    "detected": "bold",
    "valid": "green",
    "invalid": "red",
    "untested": "yellow",
    "unresolved": "dim",
    "uncoupled": "",
}


_FLAG_UNITS = {  # of the number that raised a flag, where that is no energy
    "few-cells": "cells",
    "single-batch": "batch",
    "charge-shift": "times",
    "charge-nonadditive": "e0",
    "charge-methods-differ": "e0",
    "charge-lower-bound": "e0",
    "charge-implausible": "e0",
    "mixed-ranges": "mV",
    "mixed-protocol": "protocols",
}

_FEWER_IS_WORSE = ("few-cells", "single-batch", "coarse-steps")

WIDE = 100  # columns from which a long name of a cycle has room
NARROW_NAME = 12  # columns of such a name elsewhere; two mutations fit
_UNCUT = 1_000_000  # columns; nothing wraps at this width


@contextmanager
def screen_on(stream: IO[str]) -> Iterator[Console]:
    """Console on `stream`; off a terminal it writes plain text that is never cut, wrapped or padded."""
    if stream.isatty():
        yield Console(file=stream, markup=False, highlight=False, emoji=False)
        return
    screen = Console(file=stream, width=_UNCUT, markup=False, highlight=False, emoji=False)
    with screen.capture() as captured:
        yield screen
    stream.writelines(f"{line.rstrip()}\n" for line in captured.get().splitlines())


def plus_minus_of(screen: Console) -> str:
    """The sign between a value and its uncertainty, spelt where the screen lacks it."""
    try:
        "±".encode(screen.encoding)
    except (UnicodeEncodeError, LookupError):
        return "+/-"
    return "±"


def plain_grid(headers: Sequence[tuple[str, bool]], folding: Sequence[str] = ()) -> Grid:
    """Table without rules; each header with whether its column is numeric.

    Where a screen is too narrow, the columns in `folding` give way before all others; without any, all do.
    """
    grid = Grid(box=None, padding=(0, 1, 0, 0), pad_edge=False, header_style="bold")
    for header, numeric in headers:
        grid.add_column(
            Text(header),
            justify="right" if numeric else "left",
            overflow="fold",
            no_wrap=bool(folding) and header not in folding,
        )
    return grid


def show_grid(screen: Console, grid: Grid) -> None:
    """Print a table; where the screen is too narrow for its numbers, every row on several lines."""
    if sum(map(_narrowest, grid.columns)) + len(grid.columns) - 1 <= screen.width:
        screen.print(grid)
        return
    first, *heads = [str(column.header) for column in grid.columns]
    widest = max(map(len, heads))
    for name, *cells in zip(*(column.cells for column in grid.columns), strict=True):
        if str(first) or str(name):
            screen.print(Text(str(name).replace("\n", ""), style="bold"))
        for head, cell in zip(heads, cells, strict=True):
            if str(cell):
                hanging(screen, f"  {head:{widest}} ", cell)


def _narrowest(column: Column) -> int:
    """Width of a column whose numbers stay whole and whose words, where it may fold, do."""
    texts = [str(column.header), *map(str, column.cells)]
    pieces = [piece for text in texts for piece in (text.split("\n") if column.no_wrap else text.split())]
    return max(map(len, pieces), default=0)


def broken(name: str, width: int) -> str:
    """A name of joined mutations on as many lines as a column of that width needs, broken after a slash."""
    lines = [""]
    for part in re.findall("[^/]*/|[^/]+$", name):
        if lines[-1] and len(lines[-1]) + len(part) > width:
            lines.append("")
        lines[-1] += part
    return "\n".join(lines)


def _verdict(word: str) -> Text:
    return Text(word, style=_VERDICT_STYLE[word])


def _interaction_grid(result: Result, marks: dict[str, str], plus_minus: str, width: int) -> Grid:
    grid = plain_grid(
        [
            ("cycle", False),
            (f"I ({result.settings.energy_unit})", True),
            (interval_words(result.settings), True),
            ("favours", False),
            ("verdict", False),
            ("shortcut", False),
            ("flags", False),
        ],
        folding=("flags",),
    )
    for row in by_strength(result.interactions):
        grid.add_row(
            Text(broken(row.cycle, NARROW_NAME) if width < WIDE else row.cycle),
            Text(with_uncertainty(row.interaction, row.std_uncertainty, plus_minus)),
            Text(span((row.low, row.high), row.std_uncertainty)),
            Text(row.favours or "-"),
            _verdict(row.interaction_verdict),
            _verdict(row.shortcut_verdict),
            Text(" ".join(marks[code] for code in row.flags)),
        )
    return grid


def _flag_lines(flags: Sequence[Flag], marks: dict[str, str], energy_unit: str) -> list[tuple[str, str]]:
    """Mark and sentence of each code: the worst subject in full, the others with their number."""
    lines = []
    for code, mark in marks.items():
        groups: dict[str, list[Flag]] = {}
        for flag in flags:
            if flag.code == code:
                groups.setdefault(flag.construct or flag.subject, []).append(flag)
        worst_first = sorted(groups.items(), key=lambda group: -max(map(_severity, group[1])))
        (_, first), *others = [
            (subject, sorted(g, key=lambda f: -_severity(f))) for subject, g in worst_first
        ]
        more = f" ({len(first) - 1} more of its cells too)" if len(first) > 1 else ""
        likewise = (
            f"; likewise {', '.join(_short(*other, energy_unit) for other in others)}" if others else ""
        )
        named = first[0].message if first[0].cell is None else f"{first[0].subject}: {first[0].message}"
        lines.append((mark, f"{code}: {named}{more}{likewise}"))
    return lines


def _severity(flag: Flag) -> float:
    """How bad the number of a flag is, among flags of its code."""
    value = abs(flag.value or 0.0)
    if flag.code in _FEWER_IS_WORSE:
        return -value
    return abs(math.log(value)) if flag.code == "charge-shift" and value else value


def _short(subject: str, flags: Sequence[Flag], energy_unit: str) -> str:
    """A subject with what raised the flag: its number, or how many of its cells carry it."""
    value, unit = flags[0].value, _FLAG_UNITS.get(flags[0].code, "")
    if flags[0].cell is not None:
        return f"{subject} ({len(flags)} cell{'s' if len(flags) > 1 else ''})"
    if value is None:
        return subject
    digits = f"{value:.0f}" if value == round(value) else f"{value:#.3g}".removesuffix(".")
    return f"{subject} ({digits} {unit or energy_unit})"


def print_lines(screen: Console, lines: Sequence[str], indent: int = 2) -> None:
    """Lines of text; what has to wrap hangs by `indent` columns."""
    for line in lines:
        hanging(screen, line[:indent], line[indent:])


def hanging(screen: Console, head: str, text: str | Text) -> None:
    """A head and a text beside it; where the text has to wrap it stays beside the head."""
    grid = Grid.grid()
    grid.add_column(no_wrap=True)
    grid.add_column(overflow="fold")
    grid.add_row(Text(head), Text(text) if isinstance(text, str) else text)
    screen.print(grid)


def _print_flags(screen: Console, flags: Sequence[Flag], marks: dict[str, str], energy_unit: str) -> None:
    grid = Grid.grid(padding=(0, 1, 0, 0))
    for mark, sentence in _flag_lines(flags, marks, energy_unit):
        grid.add_row(Text(f" {mark}"), Text(sentence))
    if marks:
        screen.print()
        screen.print(Text("Flags", style="bold"))
        screen.print(grid)


def print_result(result: Result, stream: IO[str]) -> None:
    """Coupling table, flags, formula, sign, unit and settings.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    stream : text stream
        At a terminal the table is fitted to its width; elsewhere the text is plain and never cut.
    """
    with screen_on(stream) as screen:
        _show_result(result, screen)


def _show_result(result: Result, screen: Console) -> None:
    marks = flag_marks([code for row in result.interactions for code in row.flags])
    relevant = _flags_of_cycles(result)
    if result.settings.title:
        screen.print(Text(result.settings.title, style="bold"))
    print_lines(
        screen,
        [f"Interaction energies I in {unit_phrase(result.settings)}{_at(result.settings)}, strongest first"],
    )
    screen.print()
    show_grid(screen, _interaction_grid(result, marks, plus_minus_of(screen), screen.width))
    _print_flags(screen, relevant, marks, result.settings.energy_unit)
    screen.print()
    orders = {row.order for row in result.interactions}
    reference = result.settings.reference_voltage_mv
    background = (
        [f"Background of every construct: {'/'.join(result.background)}"] if result.background else []
    )
    notes = [f"Note: {note}" for note in result.notes]
    print_lines(
        screen,
        [formula(reference), *sign_sentences(orders), CAUTION, *budget_sentence(result), *background, *notes],
    )
    screen.print()
    print_lines(screen, settings_sentences(result.settings))


def _at(settings: Settings) -> str:
    """Reference voltage, where it is not 0 mV."""
    return f" at {settings.reference_voltage_mv:g} mV" if settings.reference_voltage_mv else ""


def _flags_of_cycles(result: Result) -> list[Flag]:
    """Flags of the cycles and of the constructs and cells that take part in one."""
    labels = {label for row in result.interactions for label, _ in row.corners}
    cycles = {row.cycle for row in result.interactions}
    return [
        flag
        for flag in result.flags
        if (flag.construct in labels if flag.construct else flag.subject in cycles)
    ]


def _survey_line(row: SurveyRow, marks: dict[str, str], plus_minus: str) -> list[Text]:
    cells = str(row.cells_used)
    if row.cells_set_aside:
        cells += f" of {row.cells_used + row.cells_set_aside}"
    charges = "" if row.charge_n is None else f" (n = {row.charge_n})"
    charge = with_uncertainty(row.charge_e0, row.charge_sem_e0, plus_minus) + charges
    return [
        Text(row.construct),
        Text(cells),
        Text(with_uncertainty(row.median_mv, row.median_uncertainty_mv, plus_minus)),
        Text(charge or "not measured"),
        Text(" ".join(marks[code] for code in row.flags)),
    ]


def print_paragraphs(text: str, stream: IO[str]) -> None:
    """Paragraphs, wrapped at a terminal and a line each elsewhere."""
    with screen_on(stream) as screen:
        for line in text.splitlines():
            screen.print(Text(line))


def print_survey(survey: Survey, stream: IO[str]) -> None:
    """One line a construct, the flags in words, the cycles that can be formed and those that cannot."""
    with screen_on(stream) as screen:
        _show_survey(survey, screen)


def _show_cells(screen: Console, survey: Survey, marks: dict[str, str]) -> None:
    """Cells to look at: those with a flag of their own or set aside, alike ones on a line."""
    groups: dict[tuple[str, tuple[str, ...], str], list[str]] = {}
    for cell in survey.cells:
        if cell.flags or not cell.used:
            groups.setdefault((cell.construct, cell.flags, cell.reason or ""), []).append(cell.cell)
    if not groups:
        return
    grid = plain_grid([("cells to look at", False), ("", False), ("flags", False)])
    for (construct, flags, reason), cells in groups.items():
        aside = f" (not used: {reason})" if reason else ""
        grid.add_row(Text(construct), Text(", ".join(cells) + aside), Text(" ".join(marks[f] for f in flags)))
    screen.print()
    show_grid(screen, grid)


def _show_survey(survey: Survey, screen: Console) -> None:
    marks = flag_marks([flag.code for flag in survey.flags])
    grid = plain_grid(
        [("construct", False), ("cells", True), ("Vm (mV)", True), ("Q (e0)", True), ("flags", False)],
        folding=("flags",),
    )
    for row in survey.constructs:
        grid.add_row(*_survey_line(row, marks, plus_minus_of(screen)))
    show_grid(screen, grid)
    _show_cells(screen, survey, marks)
    _print_flags(screen, survey.flags, marks, survey.settings.energy_unit)
    screen.print()
    count = len(survey.cycles)
    lines = [f"{count} complete cycle{'' if count == 1 else 's'}: {', '.join(survey.cycles)}"]
    lines += [lacking(label, missing) for label, missing in survey.incomplete]
    if survey.background:
        lines.append(f"Background of every construct: {'/'.join(survey.background)}")
    lines += [f"Note: {note}" for note in survey.notes]
    print_lines(
        screen,
        [
            *lines,
            "Vm, Q: mean ± standard uncertainty, from the scatter of cells and, for Vm, from what had to be "
            "extrapolated; no energy was computed",
        ],
    )
