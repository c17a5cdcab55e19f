"""A plan as a person reads it, and its figure."""

import io
import re
from dataclasses import replace

import pytest

from cornerwise.plan_rows import NeedRow, OutlookRow, Share
from cornerwise.planning.assumed import Assumptions
from cornerwise.planning.plan import Plan, plan_assumed
from cornerwise.planning.request import PlanRequest
from cornerwise.render.figures.marks import Area, Line, Words
from cornerwise.render.figures.plan import plan_sheets
from cornerwise.render.plan_files import plan_files
from cornerwise.render.planning import further_words, print_plan, range_words
from cornerwise.tables import Table


class _Terminal(io.StringIO):
    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


def _plan(pairs: int = 2, **request: object) -> Plan:
    assumed = Assumptions(
        median_mv=(-40.0,), median_sd_mv=(2.5,), charge_e0=(13.0,), charge_sd_e0=(0.6,), pairs=pairs,
        known_from=4,
    )  # fmt: skip
    return plan_assumed(assumed, PlanRequest(**request))  # type: ignore[arg-type]


def _printed(plan: Plan, stream: io.StringIO) -> str:
    print_plan(plan, stream)
    return stream.getvalue()


def test_numbers_are_those_of_the_plan(monkeypatch: pytest.MonkeyPatch) -> None:
    plan = _plan(half_width=1.0, recordings=120)
    text = _printed(plan, io.StringIO())
    row = next(row for row in plan.outlooks if row.cells_each == 8)
    assert f"{row.half_width:.1f} ({row.half_width_low:.1f}-{row.half_width_high:.1f})" in text
    assert f"{100 * row.power:.0f}" in text  # type: ignore[operator]
    assert plan.split is not None
    assert f"{plan.split.best:.2f} with this split, {plan.split.equal:.2f} with the same number" in text
    assert "all at once" in text
    assert "kcal/mol per channel" in text
    assert not any(line.endswith(" ") for line in text.splitlines())


@pytest.mark.parametrize("request_", [{}, {"half_width": 1.0}, {"charge_verdict": "equal", "recordings": 90}])
def test_it_fits_80_columns_at_a_terminal(
    request_: dict[str, object], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    monkeypatch.setenv("NO_COLOR", "1")
    text = re.sub(r"\x1b\[[0-9;]*m", "", _printed(_plan(**request_), _Terminal()))
    assert max(map(len, text.splitlines())) <= 80


def test_what_power_counts_is_said_where_it_stands() -> None:
    several, alone = _plan(pairs=6), _plan(pairs=1)
    lines = _printed(several, io.StringIO()).splitlines()
    heading = next(i for i, line in enumerate(lines) if line.startswith("Power against"))
    assert lines[heading + 1] == (
        "power: that the 95 % interval of this cycle alone excludes 0; the verdicts also need the p value "
        "adjusted for 6 cycles"
    )
    (goal,) = [line for line in lines if line.startswith("Fewest further cells")]
    assert goal.endswith("(p not adjusted)")
    text = _printed(alone, io.StringIO())
    assert "power: that the 95 % interval of this cycle alone excludes 0\n" in text
    assert "adjusted" not in text
    drawn = plan_sheets(_plan(pairs=6, drawn=True))["figures/plan-180mm"]
    words = " ".join(mark.text for mark in drawn.marks if isinstance(mark, Words))
    assert "p value adjusted for 6 cycles" in words


def test_a_range_is_told_where_there_is_one() -> None:
    assert range_words(0.512, 0.488, 0.571, 2) == "0.51 (0.49-0.57)"
    assert range_words(0.512, 0.511, 0.513, 2) == "0.51"
    assert range_words(None, None, None, 2) == ""


def _need(further: int | None, low: int | None, high: int | None) -> NeedRow:
    shares = (Share(construct="WT", kind="curves", cells=further),) if further else ()
    return NeedRow(
        subject="A/B", goal="half-width", wanted=1.0, further=further, further_low=low, further_high=high,
        expected=None, shares=shares, reason=None,
    )  # fmt: skip


@pytest.mark.parametrize(
    ("numbers", "words"),
    [
        ((5, 3, 9), "5 (3-9)"),
        ((5, 5, 5), "5"),
        ((5, 3, None), "5 (3-more)"),
        ((None, None, None), "-"),
        ((5, None, None), "5"),
    ],
)
def test_cells_needed_in_words(numbers: tuple[int | None, ...], words: str) -> None:
    assert further_words(_need(*numbers)) == words


def test_every_cycle_has_a_panel_with_both_curves_and_their_ranges() -> None:
    plan = _plan(pairs=5, half_width=1.0, drawn=True)
    sheets = plan_sheets(plan)
    assert set(sheets) == {"figures/plan-85mm", "figures/plan-180mm"}
    for sheet in sheets.values():
        words = [mark.text for mark in sheet.marks if isinstance(mark, Words)]
        assert {f"A{i}/B{i}" for i in range(1, 6)} <= set(words)
        assert sum(isinstance(mark, Area) for mark in sheet.marks) == 10
        assert sum(isinstance(mark, Line) and bool(mark.dash) for mark in sheet.marks) == 5
        assert any("8 of 10 outcomes" in text for text in words)
        for mark in sheet.marks:
            if isinstance(mark, Line | Area):
                assert all(0 <= x <= sheet.width and 0 <= y <= sheet.height for x, y in mark.points)


def test_many_cycles_take_several_sheets() -> None:
    one = _plan(pairs=1, drawn=True, cells=(4, 8), recordings=60)
    rows = [replace(row, cycle=f"A{i}/B{i}") for i in range(20) for row in one.outlooks]
    sheets = plan_sheets(replace(one, outlooks=Table(OutlookRow, rows)))
    assert {"figures/plan-1-85mm", "figures/plan-3-85mm", "figures/plan-2-180mm"} <= set(sheets)
    assert max(sheet.height for sheet in sheets.values()) <= 230


def test_files_are_named_for_what_was_asked() -> None:
    files = plan_files(_plan(recordings=100, drawn=True))
    assert {name for name in files if not name.startswith("figures")} == {
        "plan.json",
        "plan.csv",
        "split.csv",
    }
    header, first, *_ = str(files["plan.csv"]).splitlines()
    assert header.startswith("cycle,order,cells_each,half_width,")
    assert first.split(",")[2] == "3"
