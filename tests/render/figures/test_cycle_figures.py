"""Figures of cycles: what has to be readable on them, and what may not appear."""

import re
from dataclasses import replace

import pytest
from builders import campaign, construct

from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.render.figures.files import (
    CycleFigures,
    cycle_folders,
    figure_files,
    overview_sheets,
    rendered,
)
from cornerwise.render.figures.lettering import width_of
from cornerwise.render.figures.marks import Sheet, Symbols, Words
from cornerwise.render.figures.style import INKS
from cornerwise.render.rounding import decimals_for, number, with_uncertainty
from cornerwise.result import InteractionRow, Result, Table

CHARGES = [13.0, 12.5, 13.3, 12.9]
MEDIANS = {
    "WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "K12A": -45.0, "E5A/R9Q": -20.0, "E5A/K12A": -38.0,
    "R9Q/K12A": -57.0, "E5A/R9Q/K12A": -25.0,
}  # fmt: skip


@pytest.fixture(scope="module")
def result() -> Result:
    constructs = [
        construct(
            label, [m - 1, m, m + 0.7, m + 1.4], [0.7 * q for q in CHARGES] if label == "R9Q" else CHARGES
        )
        for label, m in MEDIANS.items()
        if label != "WT"
    ]
    return couple(campaign([construct("WT", [-41.0, -40.0, -39.5, -38.8], CHARGES), *constructs]))


def _words(sheet: Sheet) -> list[str]:
    return [mark.text.replace("−", "-") for mark in sheet.marks if isinstance(mark, Words)]


_REVERSED = "Where an odd order stands beside a name, the words above the axis change places."


@pytest.mark.parametrize("width", [85.0, 180.0])
def test_a_cycle_of_odd_order_among_pairs_is_marked(result: Result, width: float) -> None:
    (sheet,) = overview_sheets(result, width)["interactions"]
    marks = [mark for mark in sheet.marks if isinstance(mark, Words)]
    (mark,) = [one for one in marks if one.text == "(order 3)"]
    (name,) = [one for one in marks if one.text == "E5A/R9Q/K12A"]
    assert mark.at[1] == name.at[1]
    assert name.at[0] + width_of(name.text, name.size) < mark.at[0]
    assert {"← activated", "resting →"} <= set(_words(sheet))
    assert _REVERSED in " ".join(_words(sheet))


@pytest.mark.parametrize(("orders", "left"), [({3}, "← resting"), ({2}, "← activated")])
def test_the_words_above_the_axis_are_those_of_the_only_kind_of_order(
    result: Result, orders: set[int], left: str
) -> None:
    some = [row for row in result.interactions if row.order in orders]
    (sheet,) = overview_sheets(replace(result, interactions=Table(InteractionRow, some)), 180.0)[
        "interactions"
    ]
    words = _words(sheet)
    assert left in words
    assert not [word for word in words if word.startswith("(order")]
    assert _REVERSED not in " ".join(words)


@pytest.mark.parametrize("width", [85.0, 180.0])
def test_the_square_shows_corners_edges_and_the_interaction(result: Result, width: float) -> None:
    row = result.interactions[0]
    words = _words(CycleFigures(result).of(row, width)["shape"])
    for label, sign in row.corners:
        one = next(one for one in result.constructs if one.construct == label)
        assert f"{'+' if sign > 0 else '-'} {label}" in words
        assert with_uncertainty(one.energy, one.std_uncertainty) in words
    for edge in row.edges:
        assert with_uncertainty(edge.difference, edge.std_uncertainty).lstrip("-") in {
            word.lstrip("+-") for word in words
        }
    assert f"I = {with_uncertainty(row.interaction, row.std_uncertainty)}" in words
    assert any("per channel" in word for word in words)
    assert any("s F Q Vm" in word for word in words)


def test_a_triple_is_a_cube_with_eight_corners_and_its_own_sign(result: Result) -> None:
    row = next(row for row in result.interactions if row.order == 3)
    words = _words(CycleFigures(result).of(row, 180.0)["shape"])
    assert (
        sum(word in words for word in (f"{'+' if s > 0 else '-'} {label}" for label, s in row.corners)) == 8
    )
    assert any("favours the activated" in word for word in words)
    assert not any("native pair" in word for word in words)


def test_interactions_are_sorted_with_their_verdicts(result: Result) -> None:
    (sheet,) = overview_sheets(result, 180.0)["interactions"]
    words = _words(sheet)
    ranked = sorted(result.interactions, key=lambda row: row.rank or 0)
    assert [word for word in words if word in {row.cycle for row in ranked}] == [row.cycle for row in ranked]
    assert [w for w in words if w in ("coupled", "detected", "uncoupled", "unresolved")] == [
        row.interaction_verdict for row in ranked
    ]


def test_every_measured_charge_is_a_point(result: Result) -> None:
    (sheet,) = overview_sheets(result, 85.0)["charges"]
    small = [m for m in sheet.marks if isinstance(m, Symbols) and m.symbol == "ring" and m.size == 1.0]
    assert sum(len(mark.points) for mark in small) == 4 * len(MEDIANS)
    assert _words(sheet).count("changed") == sum(r.charge_verdict == "changed" for r in result.constructs) > 0


def test_the_matrix_holds_every_pair_and_tells_signs_apart_without_colour(result: Result) -> None:
    (sheet,) = overview_sheets(result, 180.0)["matrix"]
    words = _words(sheet)
    pairs = [row for row in result.interactions if row.order == 2]
    shapes = [m.symbol for m in sheet.marks if isinstance(m, Symbols)]
    for row in pairs:
        assert number(row.interaction, decimals_for(row.std_uncertainty)) in words
    positive = sum((row.interaction or 0) >= 0 for row in pairs)
    round_ones = sum(shape in ("disc", "ring") for shape in shapes[: len(pairs)])
    assert round_ones == positive


def test_i_of_v_is_drawn_only_where_charges_do_not_add_up(result: Result) -> None:
    figures = CycleFigures(result)
    for row in result.interactions:
        assert ("voltage" in figures.of(row, 85.0)) == bool(row.profile)
    assert any(row.profile for row in result.interactions)


def test_the_budget_names_its_sources_largest_first(result: Result) -> None:
    row = result.interactions[0]
    words = _words(CycleFigures(result).of(row, 180.0)["budget"])
    sources = [part.source for part in result.budget if part.cycle == row.cycle]
    assert [word for word in words if word in sources] == sources[:9]


def test_summaries_alone_have_no_curves_and_no_charges() -> None:
    constructs = [construct(k, (m, 1.0, 5), summarised=True) for k, m in list(MEDIANS.items())[:3]]
    constructs.append(construct("E5A/R9Q", (-20.0, 1.0, 5), summarised=True))
    result = couple(campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.2)))
    assert sorted(CycleFigures(result).of(result.interactions[0], 85.0)) == ["budget", "shape"]
    assert overview_sheets(result, 85.0)["charges"] == []


def _ends(words: Words) -> list[tuple[float, float]]:
    """Both ends of a line of text (mm)."""
    x, y = words.at
    wide = width_of(words.text, words.size)
    before = {"start": 0.0, "middle": wide / 2, "end": wide}[words.anchor]
    if words.turned:
        return [(x, y + before), (x, y + before - wide)]
    return [(x - before, y), (x - before + wide, y)]


def test_nothing_is_written_off_the_sheet(result: Result) -> None:
    figures = CycleFigures(result)
    for width in (85.0, 180.0):
        sheets = [sheet for kind in overview_sheets(result, width).values() for sheet in kind]
        sheets += [s for row in result.interactions for s in figures.of(row, width).values()]
        for sheet in sheets:
            for mark in sheet.marks:
                places = _ends(mark) if isinstance(mark, Words) else mark.points
                assert all(
                    -0.01 <= x <= sheet.width + 0.01 and -0.01 <= y <= sheet.height for x, y in places
                ), sheet.title


def test_files_do_not_depend_on_the_number_of_processes(result: Result) -> None:
    small = replace(result, interactions=Table(InteractionRow, result.interactions[:1]))
    steps: list[tuple[str, int, int]] = []
    one = figure_files(small, workers=1)
    two = figure_files(small, lambda *step: steps.append(step), workers=2)
    assert one == two
    assert list(one) == list(two)
    assert {"figures/interactions-85mm.svg", "figures/E5A-R9Q/shape-180mm.pdf"} <= set(one)
    assert steps[-1][1] == steps[-1][2]


def test_pdf_and_svg_carry_their_font(result: Result) -> None:
    sheet = CycleFigures(result).of(result.interactions[0], 85.0)["shape"]
    pdf, svg = rendered(sheet, "pdf"), rendered(sheet, "svg").decode()
    assert b"/FontFile2" in pdf
    assert b"/Type3" not in pdf
    assert "@font-face" in svg
    assert re.search(r"<text[^>]*>\+ WT</text>", svg)
    assert rendered(sheet, "png").startswith(b"\x89PNG")


def test_folder_names_are_safe_and_differ_even_without_case() -> None:
    folders = cycle_folders(["E5A/R9Q", "e5a/r9q", "../..", "<script>", "Δ/β"])
    names = list(folders.values())
    assert all(re.fullmatch(r"[A-Za-z0-9-]+", name) for name in names)
    assert len({name.lower() for name in names}) == len(names)


def _luminance(colour: str) -> float:
    """Relative luminance of a colour as WCAG 2.2 defines it (formula from memory)."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_the_two_colours_differ_in_grey_and_words_stand_out() -> None:
    def contrast(a: str, b: str) -> float:
        first, second = sorted((_luminance(INKS[a]), _luminance(INKS[b])))  # type: ignore[index]
        return (second + 0.05) / (first + 0.05)

    assert contrast("below", "above") > 2.0
    assert contrast("ink", "paper") > 7.0
    assert contrast("pale", "paper") > 4.5
