"""Every check against something outside the project, and the page that shows them.

``python tests/outside_checks.py`` writes `docs/outside_checks.md` again.
"""

from __future__ import annotations

import sys
from pathlib import Path

from outside import (
    charges,
    constants,
    curves,
    cycles,
    many_tests,
    propagation,
    replicates,
    two_means,
    words,
)
from outside.record import PRACTICE, Check, Standing, Value, obtained
from reference_values import all_sources

PAGE = Path(__file__).parents[1] / "docs" / "outside_checks.md"

GROUPS: dict[str, list[Check]] = {
    "Cycles": cycles.CHECKS,
    "Curves and median voltages": curves.CHECKS,
    "Total charge": charges.CHECKS,
    "Constants and units": constants.CHECKS,
    "Propagation of uncertainty": propagation.CHECKS,
    "Two means: intervals, t tests, equivalence": two_means.CHECKS,
    "Many pairs: adjusted p values": many_tests.CHECKS,
    "Replicates: Monte Carlo and bootstrap": replicates.CHECKS,
    "Rounding": words.ROUNDING,
    "Labels": words.LABELS,
    "Facts of the trade": words.TRADE,
}

SECTIONS: dict[Standing, tuple[str, str]] = {
    "published": (
        "Against published numbers",
        "The expected digits were read in a document, a data set or the tests of a reference library; the "
        "list of sources says where.",
    ),
    "recomputed": (
        "Worked out from published numbers",
        "The inputs were read, the expected result is our arithmetic on them and is printed nowhere.",
    ),
    "memory": (
        "From memory",
        "Recalled, not read: not called published, and no proof. A disagreement would still be a reason to "
        "look.",
    ),
    "practice": (
        "Common practice, no source",
        "What everybody in the trade would say.",
    ),
}

# Checks that need more than one number: what, against what, and the test that does it.
ELSEWHERE = [
    (
        "t intervals and p values at fractional degrees of freedom",
        "`scipy.stats`",
        "tests/test_intervals.py::test_t_against_scipy",
    ),
    (
        "adjusted p values of a whole campaign",
        "`scipy.stats.false_discovery_control`",
        "tests/test_standings.py::test_adjustment_by_benjamini_and_hochberg",
    ),
    (
        "cells recorded in batches: estimates",
        "ordinary least squares of statsmodels",
        "tests/test_batches.py::test_complete_blocks_are_least_squares_on_construct_and_batch",
    ),
    (
        "replicates of a mean of few cells",
        "Student's t distribution of `scipy.stats`, by the test of Kolmogorov and Smirnov",
        "tests/test_ledger.py::test_conservative_draws_are_students_t",
    ),
    (
        "the report in a browser: accessibility",
        "the rules of axe-core",
        "tests/render/report/test_browser.py::test_accessibility",
    ),
    (
        "the colours of the figures",
        "contrast as WCAG 2.2 defines it (formula from memory)",
        "tests/render/figures/test_cycle_figures.py::test_the_two_colours_differ_in_grey_and_words_stand_out",
    ),
]

GAPS = [
    "From a recorded curve to its median voltage: no publication was found that gives both the points of a "
    "charge-voltage curve and its median. Medians are checked on exact curves of gating schemes whose "
    "energies are known, on the certified growth curve and on the binding curve above.",
    "A cycle whose total charge was measured in every corner: none was found. The charge interaction J, the "
    "shortcut's bias and the charge verdicts are checked by hand-worked values only; the published "
    "charge-voltage cycle takes one charge for all corners.",
    "Total charge from a limiting slope: no published worked example with its digits was found. It is "
    "checked against two states worked out by hand and against schemes whose charge is known.",
    "A cycle of three or more mutations: no publication with all its corners was found.",
    "Percentiles read at widened levels, the bootstrap interval of the tables: only the plain percentile is "
    "checked; the widening is checked against Student's t on exact normal draws.",
    "Coverage of the intervals, for few cells, skewed cells and batches: our own simulation, see "
    "`statistics.md`.",
    "Rank limits, simultaneous intervals, the probability of being among the first, shrunken estimates: "
    "second implementations and exact special cases in the tests, no published example.",
    "Doubts about curves (flags and their limits), and whether a curve rises at all: our own choices, "
    "tested by simulation.",
    "The margins and thresholds of the verdicts: a convention for the user to set.",
    "Figures and the words of the report: looked at, not compared with anything.",
]


def _shown(value: Value, form: str) -> str:
    """A value in a cell of a table; of a long row the first three and the last."""
    if isinstance(value, str):
        return value
    if not isinstance(value, tuple):
        return format(value, form)
    texts = [format(one, form) for one in value]
    if len(texts) > 6:
        return f"{', '.join(texts[:3])}, ... {texts[-1]} ({len(texts)} values)"
    return ", ".join(texts)


def _tolerance(check: Check) -> str:
    if not check.within or isinstance(check.expected, str):
        return f"exactly; {check.why}"
    return f"{'relative ' if check.relative else ''}{check.within:g}; {check.why}"


def _row(check: Check) -> str:
    expected = check.printed or _shown(check.expected, ".12g")
    cells = [check.what, check.source, expected, _shown(obtained(check), check.form), _tolerance(check)]
    return f"| {' | '.join(cells)} |"


def _section(standing: Standing) -> list[str]:
    title, words_above = SECTIONS[standing]
    lines = [f"## {title}", "", words_above, ""]
    for group, checks in GROUPS.items():
        rows = [_row(check) for check in checks if check.standing == standing]
        if rows:
            head = "| what | source | expected | obtained | largest difference allowed, and why |"
            lines += [f"### {group}", "", head, "|---|---|---|---|---|", *rows, ""]
    return lines


def all_checks() -> list[Check]:
    """Every check of every group."""
    return [check for checks in GROUPS.values() for check in checks]


def _intro() -> list[str]:
    counts = {standing: sum(c.standing == standing for c in all_checks()) for standing in SECTIONS}
    return [
        "# Outside checks",
        "",
        f"This page compares what the program computes with {len(all_checks())} values from outside the "
        f"project: {counts['published']} published ones, {counts['recomputed']} worked out from published "
        f"numbers, {counts['memory']} recalled from memory and {counts['practice']} facts of the trade. "
        "Every obtained value comes from the package's own functions while the tests run; they fail when one "
        "is not as expected, and when this page is not what they obtain (`python tests/outside_checks.py` "
        "writes it again). Where a published number and ours differ in a known way, the row says so. "
        "Invented data never pose as a check. What nothing outside vouches for stands at the end.",
        "",
    ]


def _elsewhere() -> list[str]:
    rows = [f"| {what} | {against} | `{test.split('::')[0]}` |" for what, against, test in ELSEWHERE]
    return [
        "## Against other programs and standards, in tests of their own",
        "",
        "| what | against | where |",
        "|---|---|---|",
        *rows,
        "",
    ]


def _sources() -> list[str]:
    passports = all_sources()
    used = sorted({check.source for check in all_checks()} - {PRACTICE}, key=str.casefold)
    rows = []
    for key in used:
        ((standing, text),) = passports[key].items()
        rows.append(f"| {key} | {text}{' (from memory)' if standing == 'memory' else ''} |")
    return [
        "## Sources",
        "",
        "| source | what it is and where its digits were read |",
        "|---|---|",
        *rows,
        "",
    ]


def _gaps() -> list[str]:
    return ["## What is not checked against anything outside", "", *(f"- {gap}" for gap in GAPS)]


def render() -> str:
    """The page."""
    lines = [*_intro(), *(line for standing in SECTIONS for line in _section(standing))]
    return "\n".join([*lines, *_elsewhere(), *_sources(), *_gaps()]) + "\n"


if __name__ == "__main__":
    PAGE.write_text(render(), encoding="utf-8", newline="\n")
    sys.stdout.write(f"{PAGE.name}: {len(all_checks())} checks\n")
