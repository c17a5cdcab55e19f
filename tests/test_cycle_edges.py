"""Energy differences along the edges of a cycle, against sums made by hand."""

import pytest
from builders import campaign, construct

from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.result import Result


@pytest.fixture(scope="module")
def result() -> Result:
    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}
    charge = StatedCharge(value_e0=13.0, sem_e0=0.5)
    return couple(campaign([construct(k, [m - 1, m, m + 1]) for k, m in medians.items()], charge=charge))


def test_every_edge_adds_one_mutation_and_is_the_difference_of_its_ends(result: Result) -> None:
    energy = {row.construct: row.energy for row in result.constructs}
    edges = {(e.start, e.end): e for e in result.interactions[0].edges}
    assert set(edges) == {("WT", "E5A"), ("WT", "R9Q"), ("E5A", "E5A/R9Q"), ("R9Q", "E5A/R9Q")}
    assert edges["E5A", "E5A/R9Q"].mutation == "R9Q"
    for (start, end), edge in edges.items():
        assert edge.difference == pytest.approx(energy[end] - energy[start], rel=1e-12)


def test_opposite_edges_differ_by_the_interaction(result: Result) -> None:
    row = result.interactions[0]
    edges = {(e.start, e.end): e.difference for e in row.edges}
    assert edges["E5A", "E5A/R9Q"] - edges["WT", "R9Q"] == pytest.approx(row.interaction, rel=1e-9)


def test_a_shared_charge_is_counted_once(result: Result) -> None:
    (edge,) = [e for e in result.interactions[0].edges if e.end == "E5A"]
    rows = {row.construct: row for row in result.constructs}
    apart = (rows["E5A"].std_uncertainty ** 2 + rows["WT"].std_uncertainty ** 2) ** 0.5
    assert 0 < edge.std_uncertainty < apart


def test_charges_of_single_cells_are_kept() -> None:
    constructs = [
        construct(k, [-41.0, -40.0, -39.0], [13.0, 12.5, 13.3]) for k in ("WT", "E5A", "R9Q", "E5A/R9Q")
    ]
    result = couple(campaign(constructs))
    assert result.constructs[0].charge_values == (13.0, 12.5, 13.3)
