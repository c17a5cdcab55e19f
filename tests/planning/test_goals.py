"""Verdicts on charges: probabilities against campaigns judged by the package's own verdict."""

import math

import numpy as np
import pytest

from cornerwise.charge_judgement import cells_for_verdict
from cornerwise.intervals import ratio_interval, welch_satterthwaite
from cornerwise.planning.goals import Judged, NarrowEnough, StrongEnough, reached, score, within_reach
from cornerwise.planning.prospects import Fixed, Prospect, Recording, Term
from cornerwise.verdicts import charge_verdict

KINDS = [Recording("A", "charges"), Recording("WT", "charges")]


def _ratio(scatters: tuple[float, float], value: float = 0.0) -> Prospect:
    terms = tuple(
        Term(recording=kind, sd=sd, scatter_dof=math.inf) for kind, sd in zip(KINDS, scatters, strict=True)
    )
    return Prospect(name="A", value=value, terms=terms)


def _judged(verdict: str, wanted: float = 0.8, truth: float | None = None) -> Judged:
    return Judged(wanted=wanted, verdict=verdict, margin=0.10, level=0.95, truth=truth)  # type: ignore[arg-type]


@pytest.mark.parametrize("true_ratio", [1.0, 0.95, 1.08, 1.2])
@pytest.mark.parametrize(("scatters", "cells"), [((0.04, 0.04), (5, 5)), ((0.05, 0.08), (4, 12))])
def test_probabilities_are_those_of_verdicts_on_simulated_charges(
    true_ratio: float, scatters: tuple[float, float], cells: tuple[int, int]
) -> None:
    rng = np.random.default_rng([int(100 * true_ratio), *cells])
    given = {"equal": 0, "changed": 0, "unresolved": 0}
    campaigns = 2500
    for _ in range(campaigns):
        a = true_ratio * (1 + scatters[0] * rng.standard_normal(cells[0]))
        w = 1 + scatters[1] * rng.standard_normal(cells[1])
        variances = [np.var(x, ddof=1) / x.size / x.mean() ** 2 for x in (a, w)]
        u, dof = math.sqrt(sum(variances)), welch_satterthwaite(variances, [n - 1.0 for n in cells])
        found = (
            ratio_interval(a.mean() / w.mean(), u, dof, 0.90),
            ratio_interval(a.mean() / w.mean(), u, dof, 0.95),
        )
        given[charge_verdict(*found, 0.10)] += 1
    totals = dict(zip(KINDS, cells, strict=True))
    one = _ratio(scatters)
    for verdict in ("equal", "changed"):
        # to 0.02 for simulation, and as the ratio's logarithm is taken as normal
        told = score(_judged(verdict, truth=math.log(true_ratio)), one, totals)
        assert told == pytest.approx(
            given[verdict] / campaigns, abs=0.035
        )  # the ratio's logarithm is taken as normal


def test_the_number_that_couple_names_gives_the_verdict_only_if_the_ratio_comes_out_the_same() -> None:
    """`cells_for_verdict` says with how many values a ratio of just 1 would do; a plan says how often."""
    n = cells_for_verdict(1.0, (0.08, 0.08), 0.10, 0.95)
    assert n is not None
    told = score(_judged("equal", truth=0.0), _ratio((0.08, 0.08)), dict.fromkeys(KINDS, n))
    assert 0.1 < told < 0.3


def test_a_ratio_beyond_the_margin_is_never_shown_to_be_equal() -> None:
    one = _ratio((0.04, 0.04), value=math.log(1.15))
    assert not within_reach(_judged("equal").of(one.value), one)
    assert within_reach(_judged("changed").of(one.value), one)
    assert not within_reach(_judged("changed").of(0.0), one)
    assert within_reach(_judged("equal", truth=0.0), one)


def test_a_part_that_stays_can_be_too_large() -> None:
    one = Prospect(
        name="I",
        value=0.0,
        terms=_ratio((1.0, 1.0)).terms,
        fixed=(Fixed("offset", 0.25, math.inf, "voltage offset"),),
    )
    assert within_reach(NarrowEnough(wanted=1.0, confidence=0.95), one)
    assert not within_reach(NarrowEnough(wanted=0.9, confidence=0.95), one)
    assert not within_reach(StrongEnough(wanted=0.8, truth=1.3, confidence=0.95), one)
    assert within_reach(StrongEnough(wanted=0.8, truth=1.5, confidence=0.95), one)


def test_to_be_sure_takes_more_than_to_be_lucky() -> None:
    terms = tuple(Term(recording=kind, sd=1.0, scatter_dof=3.0, kept=4, kept_dof=3.0) for kind in KINDS)
    one = Prospect(name="I", value=0.0, terms=terms)
    totals = dict.fromkeys(KINDS, 10)
    for goal in (
        NarrowEnough(wanted=1.0, confidence=0.95),
        StrongEnough(wanted=0.8, truth=1.4, confidence=0.95),
    ):
        lucky, seen, sure = (score(goal, one, totals, s) for s in ("lucky", "as seen", "sure"))  # type: ignore[arg-type]
        assert sure < seen < lucky
        assert reached(goal, one, totals) == (seen >= goal.need)
