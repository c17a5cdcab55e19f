"""Differences of two means: Welch's intervals, t tests and equivalence."""

import math
from collections.abc import Callable
from functools import partial

from outside.known import Known, X, apart, ledger_of, one, paired, sample, source_of
from outside.record import Check, Value
from reference_values import load

from cornerwise.intervals import Interval, ratio_interval
from cornerwise.quantities import Sample, Summary
from cornerwise.verdicts import charge_verdict

WELCH = load("welch_tost")
LAKENS, ONE, YIELDS = WELCH["lakens"], WELCH["one_sample"], WELCH["yields"]


def clinic(variable: str) -> tuple[Sample, Sample]:
    data = WELCH["clinic"][variable]
    return sample(data["x"]), sample(data["y"])


def yields() -> Known:
    return apart(sample(YIELDS["A"]), sample(YIELDS["B"]))


def _lakens() -> Known:
    x, y = (
        Summary(mean=m, sem=sd / math.sqrt(n), n=n)
        for m, sd, n in zip(LAKENS["m"], LAKENS["sd"], LAKENS["n"], strict=True)
    )
    return apart(x, y)


def _one_group() -> Known:
    summary = Summary(mean=ONE["m"], sem=ONE["sd"] / math.sqrt(ONE["n"]), n=ONE["n"])
    return Known(one(X, ONE["m"] - ONE["mu"]), ledger_of([source_of(X, summary)]))


def _logarithms() -> Known:
    x, y = (sample([math.log(value) for value in group.values]) for group in clinic("var1"))
    return apart(x, y)


def _ratio() -> Interval:
    found = _logarithms()
    return ratio_interval(math.exp(found.derived.value), found.u, found.dof, 0.90)


_R = partial(Check, source="R on the clinic data", relative=True, within=WELCH["tolerance"], form=".7g")
_R_WHY = WELCH["tolerance_reason"]


def _against_r(words: str, case: dict, found: Callable[[], Known]) -> list[Check]:
    """Standard error, degrees of freedom, 90 % interval, p value and outcome of two one-sided tests."""
    bound = case["epsilon"]

    def numbers() -> Value:
        return found().u, found().dof

    return [
        _R(what=f"{words}: standard error, degrees of freedom", expected=(case["se_diff"], case["df"]),
           obtained=numbers, why=_R_WHY),
        _R(what=f"{words}: 90 % interval", expected=tuple(case["ci_diff"]),
           obtained=lambda: tuple(found().interval(0.90)), why=_R_WHY),
        _R(what=f"{words}: p value of two one-sided tests within ±{bound:.4g}", expected=case["p_value"],
           obtained=lambda: found().one_sided(bound)[0], why=f"{_R_WHY}; the nearer bound decides"),
        _R(what=f"{words}: a difference beyond ±{bound:.4g}, by the two tests", expected=case["result"],
           obtained=lambda: found().equivalence(bound), why="the 90 % interval lies inside the bounds"),
    ]  # fmt: skip


CHECKS = [
    *_against_r("var1, two groups", WELCH["welch"]["var1"], lambda: apart(*clinic("var1"))),
    *_against_r("var2, two groups", WELCH["welch"]["var2"], lambda: apart(*clinic("var2"))),
    *_against_r("var1, in pairs", WELCH["paired"]["var1"], lambda: paired(*clinic("var1"))),
    *_against_r("var2, in pairs", WELCH["paired"]["var2"], lambda: paired(*clinic("var2"))),
    *_against_r("ln var1, two groups", WELCH["logarithms"]["var1"], _logarithms),
    _R(
        what="ln var1, two groups: 90 % interval of the ratio",
        expected=tuple(math.exp(limit) for limit in WELCH["logarithms"]["var1"]["ci_diff"]),
        obtained=lambda: tuple(_ratio()),
        why=f"{_R_WHY}; exponentials of the published limits",
        standing="recomputed",
    ),
    _R(
        what="ln var1, two groups: verdict on a charge ratio with that interval and a margin of 25 %",
        expected="equal",
        obtained=lambda: charge_verdict(_ratio(), _ratio(), 0.25),
        why="published as equivalent within 1/1.25 to 1.25; the margin here is 0.75 to 1.25, and the "
        "interval lies inside both",
        standing="recomputed",
    ),
    _R(
        what="var1, two groups, against 0: t and one-sided p value",
        expected=(WELCH["t_test"]["statistic_against_0"], WELCH["t_test"]["p_one_sided_against_0"]),
        obtained=lambda: (
            apart(*clinic("var1")).derived.value / apart(*clinic("var1")).u,
            *apart(*clinic("var1")).one_sided(0.0),
        ),
        why=_R_WHY,
    ),
    _R(
        what="var1, two groups, against 1: two-sided p value and 95 % interval",
        expected=(WELCH["t_test"]["p_value_against_1"], *WELCH["t_test"]["conf_int"]),
        obtained=lambda: (
            apart(*clinic("var1")).p_against(1.0),
            *apart(*clinic("var1")).interval(0.95),
        ),
        why=_R_WHY,
    ),
    _R(
        what="var1, in pairs: two-sided p value and 95 % interval",
        expected=(WELCH["paired_t_test"]["p_value"], *WELCH["paired_t_test"]["conf_int"]),
        obtained=lambda: (
            paired(*clinic("var1")).p_against(0.0),
            *paired(*clinic("var1")).interval(0.95),
        ),
        why=_R_WHY,
    ),
    Check(
        what="two groups known by mean, deviation and number (95 and 89): degrees of freedom",
        source="Lakens 2017",
        expected=LAKENS["df"],
        obtained=lambda: _lakens().dof,
        within=5e-5,
        form=".4f",
        why="printed to four decimals; the text's t(182) is of the pooled variance",
    ),
    Check(
        what="the groups of 95 and 89: 90 and 95 % intervals",
        source="Lakens 2017",
        expected=(*LAKENS["ci90"], *LAKENS["ci95"]),
        obtained=lambda: (*_lakens().interval(0.90), *_lakens().interval(0.95)),
        within=1e-6,
        form=".6f",
        why="printed to seven decimals",
    ),
    Check(
        what="the groups of 95 and 89: p values of two one-sided tests within ±0.3836",
        source="Lakens 2017",
        expected=(LAKENS["p1"], LAKENS["p2"]),
        obtained=lambda: _lakens().one_sided(-LAKENS["bound"], LAKENS["bound"]),
        within=1e-5,
        relative=True,
        form=".5g",
        why="printed to seven digits, bounds too",
    ),
    Check(
        what="one group known by mean, deviation and number (100): 90 and 95 % intervals",
        source="TOSTER one sample",
        expected=(*ONE["ci90"], *ONE["ci95"]),
        obtained=lambda: (*_one_group().interval(0.90), *_one_group().interval(0.95)),
        within=1e-6,
        form=".6f",
        why="printed to seven decimals",
    ),
    Check(
        what="the group of 100: p values of two one-sided tests within ±0.36",
        source="TOSTER one sample",
        expected=(ONE["p1"], ONE["p2"]),
        obtained=lambda: _one_group().one_sided(*ONE["bounds"]),
        within=1e-6,
        relative=True,
        form=".6g",
        why="printed to seven digits",
    ),
    Check(
        what="yields of 13 and 16 plots: difference, standard error, degrees of freedom",
        source="NCSS yields",
        expected=(YIELDS["diff"], YIELDS["welch"]["se"], YIELDS["welch"]["df"]),
        obtained=lambda: (yields().derived.value, yields().u, yields().dof),
        within=5e-4,
        form=".3f",
        why="degrees of freedom are printed to three decimals",
    ),
    Check(
        what="yields of 13 and 16 plots: 95 % interval",
        source="NCSS yields",
        expected=tuple(YIELDS["welch"]["ci95"]),
        obtained=lambda: tuple(yields().interval(0.95)),
        within=5e-5,
        form=".4f",
        why="printed to five decimals",
    ),
    Check(
        what="yields of 13 and 16 plots: p values of two one-sided tests within ±110",
        source="NCSS yields",
        expected=(YIELDS["welch"]["p_lower"], YIELDS["welch"]["p_upper"]),
        obtained=lambda: yields().one_sided(-YIELDS["bound"], YIELDS["bound"]),
        within=5e-6,
        form=".5f",
        why="printed to five decimals",
    ),
]
