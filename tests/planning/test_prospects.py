"""What further cells would do, read off the sources of a campaign."""

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest
from builders import batched, cells, measurement

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.charge_judgement import compared_charges, judge_charge
from cornerwise.energies import EnergyBook
from cornerwise.estimates import Estimate, estimate
from cornerwise.measurements import Measurement
from cornerwise.mutations import find_cycles
from cornerwise.planning.assumed import Assumptions, assumed_prospects
from cornerwise.planning.outlook import outlook
from cornerwise.planning.pooling import pooled_scatters
from cornerwise.planning.prospects import Prospect, Recording, brought_to, kept_cells, prospect
from cornerwise.quantities import Summary

LABELS = ("WT", "E5A", "R9Q", "E5A/R9Q")
MEDIANS = (-40.0, -33.0, -47.0, -36.0)
RNG = np.random.default_rng(4)
V = [m + 2.0 * RNG.standard_normal(6) for m in MEDIANS]
Q = [13.0 + 0.6 * RNG.standard_normal(6) for _ in MEDIANS]


def _settings(**changes: object) -> Settings:
    return Settings(**{"wild_type": "WT", "replicates": 100, **changes})


def _book(made: Sequence[Measurement], settings: Settings) -> tuple[EnergyBook, Estimate, Prospect]:
    book = EnergyBook(made, settings)
    (cycle,) = find_cycles({frozenset(one.construct.mutations): one.label for one in made})
    found, _ = estimate(cycle, book, settings)
    scatters = pooled_scatters(book.ledger)
    interaction = found.interaction
    return book, found, prospect(cycle.name, interaction.energy, interaction.ledger, scatters)


def _separate() -> list[Measurement]:
    return [measurement(k, cells(v), cells(q, "n")) for k, v, q in zip(LABELS, V, Q, strict=True)]


def _medians_only() -> list[Measurement]:
    return [measurement(k, cells(v)) for k, v in zip(LABELS, V, strict=True)]


def _paired() -> list[Measurement]:
    return [measurement(k, cells(v), cells(q)) for k, v, q in zip(LABELS, V, Q, strict=True)]


def _in_batches(names: Sequence[Sequence[str]]) -> list[Measurement]:
    return [
        measurement(k, batched(v, own), batched(q, own, "n"))
        for k, v, q, own in zip(LABELS, V, Q, names, strict=True)
    ]


SAME = [["a", "a", "b", "b", "c", "c"]] * 4
OWN = [[f"{k}{i // 2}" for i in range(6)] for k in LABELS]
_SUMMARY = Summary(mean=13.0, sem=0.3, n=4)
CAMPAIGNS = {
    "separate": (_separate(), _settings()),
    "paired": (_paired(), _settings()),
    "shared charge": ([_separate()[0], *_medians_only()[1:]], _settings(charge="wild-type")),
    "stated charge": (
        _medians_only(),
        _settings(charge=StatedCharge(value_e0=13.0, sem_e0=0.4), voltage_offset_mv=1.0),
    ),
    "summaries": (
        [
            measurement(k, Summary(mean=m, sem=0.9, n=5), _SUMMARY)
            for k, m in zip(LABELS, MEDIANS, strict=True)
        ],
        _settings(),
    ),
    "curve shape": ([replace(one, truncation_mv=0.7) for one in _separate()], _settings()),
    "same batches": (_in_batches(SAME), _settings()),
    "own batches": (_in_batches(OWN), _settings()),
}


@pytest.mark.parametrize("kind", CAMPAIGNS)
def test_the_half_width_now_is_the_one_that_couple_gives(kind: str) -> None:
    made, settings = CAMPAIGNS[kind]
    _, found, one = _book(made, settings)
    now = outlook(one, kept_cells([one]), truth=1.0, confidence=0.95).half_width
    assert now.expected == pytest.approx((found.interval.high - found.interval.low) / 2, rel=1e-5)
    assert (now.low, now.high) == pytest.approx((now.expected, now.expected), rel=1e-5)


def test_what_can_be_recorded_is_named() -> None:
    def recordings(kind: str) -> set[tuple[str, str]]:
        _, _, one = _book(*CAMPAIGNS[kind])
        return {term.recording for term in one.terms}

    assert recordings("separate") == {(k, kind) for k in LABELS for kind in ("curves", "charges")}
    assert recordings("paired") == {(k, "curves with charges") for k in LABELS}
    assert recordings("shared charge") == {("WT", "charges"), *((k, "curves") for k in LABELS)}
    assert recordings("stated charge") == {(k, "curves") for k in LABELS}
    assert recordings("same batches") == recordings("own batches") == recordings("separate")


def test_what_no_cell_makes_smaller_is_fixed() -> None:
    _, _, stated = _book(*CAMPAIGNS["stated charge"])
    assert [part.name for part in stated.fixed] == ["stated total charge, shared by all constructs"]
    _, _, shape = _book(*CAMPAIGNS["curve shape"])
    assert [part.name for part in shape.fixed] == [f"curve shape and extrapolation of {k}" for k in LABELS]


def test_batches_are_counted_where_couple_counts_them() -> None:
    _, _, within = _book(*CAMPAIGNS["same batches"])
    medians = [term for term in within.terms if term.recording.kind == "curves"]
    assert sum(term.kept_dof for term in medians) == pytest.approx(24 - 4 - 3 + 1)
    # three more batches with two cells of each construct: 48 cells, 4 constructs, 6 batches
    assert sum(term.kept_dof + 6 * term.dof_each for term in medians) == pytest.approx(48 - 4 - 6 + 1)
    assert {term.step for term in medians} == {1}
    _, _, means = _book(*CAMPAIGNS["own batches"])
    own = [term for term in means.terms if term.recording.kind == "curves"]
    assert [(term.kept_dof, term.dof_each, term.step) for term in own] == [(2.0, 0.5, 2)] * 4
    assert brought_to([means], 9)[Recording("WT", "curves")] == 10


def test_partly_shared_cells_keep_their_variance() -> None:
    made = [
        measurement(k, cells(v), {**cells(q[:3]), **cells(q[3:], "n")})
        for k, v, q in zip(LABELS, V, Q, strict=True)
    ]
    _, found, one = _book(made, _settings())
    squared = sum(term.sd**2 / term.kept for term in one.terms)
    assert math.sqrt(squared) == pytest.approx(found.std_uncertainty)
    assert {term.recording.kind for term in one.terms} == {"curves", "charges"}


def test_too_few_cells_borrow_the_scatter_of_the_others() -> None:
    made = [measurement("WT", cells(V[0][:1]), cells(Q[0], "n")), *_separate()[1:]]
    _, _, one = _book(made, _settings())
    (lent,) = [term for term in one.terms if term.lent]
    assert lent.recording == ("WT", "curves")
    pooled = math.sqrt(np.mean([np.var(v, ddof=1) for v in V[1:]]))
    per_mv = 0.0230605 * np.mean(Q[0])
    assert lent.sd == pytest.approx(per_mv * pooled, rel=1e-5)
    assert lent.scatter_dof == pytest.approx(15)
    assert (lent.kept, lent.kept_dof) == (1.0, 0.0)


def test_a_lone_paired_cell_borrows_nothing() -> None:
    made = [measurement("WT", cells(V[0][:1]), cells(Q[0][:1])), *_paired()[1:]]
    _, _, one = _book(made, _settings())
    assert one.unknown == (Recording("WT", "curves with charges"),)


def test_a_charge_ratio_is_compared_as_couple_compares_it() -> None:
    made = _separate()
    settings = _settings()
    book, _, _ = _book(made, settings)
    compared = compared_charges("E5A", book, "WT")
    assert compared is not None
    one = prospect("E5A", *compared, pooled_scatters(book.ledger))
    judged = judge_charge("E5A", {m.label: m for m in made}, book, settings)
    now = outlook(one, kept_cells([one]), truth=0.1, confidence=0.95).half_width.expected
    assert now == pytest.approx((math.log(judged.difference.high / judged.difference.low)) / 2, rel=1e-5)
    assert {term.recording for term in one.terms} == {("E5A", "charges"), ("WT", "charges")}


@pytest.mark.parametrize(
    ("charges", "kind", "policy"),
    [("separate", "n", "measured"), ("paired", "c", "measured"), ("shared", "n", "wild-type")],
)
def test_assumed_scatters_are_those_of_a_campaign_that_shows_them(
    charges: str, kind: str, policy: str
) -> None:
    """Many simulated cells with the assumed scatters, against the prospect formed from the assumptions."""
    rng = np.random.default_rng(8)
    sds, n, correlation = (2.0, 2.0, 3.0, 4.0), 20_000, 0.5
    made = []
    for label, median, sd in zip(LABELS, MEDIANS, sds, strict=True):
        x, y = rng.standard_normal((2, n))
        shared = correlation * x + math.sqrt(1 - correlation**2) * y if charges == "paired" else y
        made.append(measurement(label, cells(median + sd * x), cells(13.0 + 0.6 * shared, kind)))
    _, _, shown = _book(made, _settings(charge=policy))
    ((assumed,), _) = assumed_prospects(
        Assumptions(
            median_mv=MEDIANS, median_sd_mv=sds, charge_e0=(13.0,), charge_sd_e0=(0.6,), charges=charges,
            correlation=correlation,
        )
    )  # fmt: skip
    assert assumed.value == pytest.approx(shown.value, abs=0.05)
    assert [term.sd for term in assumed.terms] == pytest.approx(
        [term.sd for term in sorted(shown.terms, key=_order(assumed))], rel=0.03
    )


def _order(like: Prospect):  # type: ignore[no-untyped-def]
    names = dict(zip(LABELS, ("WT", "A", "B", "A/B"), strict=True))
    places = {term.recording: place for place, term in enumerate(like.terms)}
    return lambda term: places[Recording(names[term.recording.construct], term.recording.kind)]
