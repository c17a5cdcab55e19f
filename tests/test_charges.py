"""Which total charge is used, and what is doubtful about it."""

import math

import numpy as np
import pytest
from builders import campaign, construct

from cornerwise.campaign import (
    ChargeReplicate,
    ChargeSummary,
    Construct,
    Exclusion,
    OpeningCurve,
    StatedCharge,
)
from cornerwise.charges import (
    charge_values,
    choose,
    method_flags,
    plausibility_flags,
)
from cornerwise.coupling import couple
from cornerwise.errors import DataRefused, Origin
from cornerwise.gating import LinearSequence
from cornerwise.mutations import parse_mutation


def _cells(method: str | None, values: list[float], **more: float) -> tuple[ChargeReplicate, ...]:
    return tuple(
        ChargeReplicate(construct="WT", cell=f"c{i}", charge_e0=value, method=method, **more)
        for i, value in enumerate(values)
    )


def _construct(*replicates: ChargeReplicate, summaries: tuple[ChargeSummary, ...] = ()) -> Construct:
    return Construct(label="WT", mutations=(), charge_replicates=replicates, charge_summaries=summaries)


NOISE, COUNT = _cells("noise analysis", [13.0, 12.6, 13.4]), _cells("channel count", [12.0, 12.2])


def test_values_are_kept_apart_by_method() -> None:
    values = charge_values(_construct(*NOISE, *COUNT), 22.0)
    assert [(v.method, v.quantity.n, round(v.quantity.mean, 6)) for v in values] == [
        ("channel count", 2, 12.1),
        ("noise analysis", 3, 13.0),
    ]


def test_the_method_with_most_cells_is_used_unless_another_is_preferred() -> None:
    values = charge_values(_construct(*NOISE, *COUNT), 22.0)
    assert choose(values, None).method == "noise analysis"  # type: ignore[union-attr]
    assert choose(values, "channel count").method == "channel count"  # type: ignore[union-attr]
    assert choose(values, "a third").method == "noise analysis"  # type: ignore[union-attr]
    assert choose((), "noise analysis") is None


def test_literature_value_is_trusted_as_it_stands_and_cited() -> None:
    cited = ChargeSummary(construct="WT", charge_e0=13.0, sem_e0=0.4, n=None, citation="a paper, 2001")
    (value,) = charge_values(_construct(summaries=(cited,)), 22.0)
    assert value.source == "literature: a paper, 2001"
    assert math.isinf(value.quantity.dof)


def test_one_counted_cell_has_the_uncertainty_of_its_count() -> None:
    (value,) = charge_values(_construct(*_cells(None, [13.0], own_uncertainty_e0=0.7)), 22.0)
    assert (value.quantity.mean, value.quantity.sem) == (13.0, 0.7)
    (pair,) = charge_values(_construct(*_cells(None, [13.0, 12.0], own_uncertainty_e0=0.7)), 22.0)
    assert pair.quantity.sem == pytest.approx(np.std([13.0, 12.0], ddof=1) / math.sqrt(2))


@pytest.mark.parametrize(("other", "flagged"), [([12.9, 13.3, 12.7], False), ([11.0, 11.2, 10.9], True)])
def test_methods_that_disagree_are_flagged(other: list[float], flagged: bool) -> None:
    one = _construct(*NOISE, *_cells("channel count", other))
    values = charge_values(one, 22.0)
    flags = method_flags(one, values, choose(values, "noise analysis"), 0.95)  # type: ignore[arg-type]
    assert [flag.code for flag in flags] == (["charge-methods-differ"] if flagged else [])
    if flagged:
        assert flags[0].value == pytest.approx(np.mean(other) - 13.0)


@pytest.mark.parametrize(
    ("charge", "wild_type", "flagged"),
    [
        (13.0, None, False),
        (3.0, None, False),
        (2.99, None, True),
        (16.0, None, False),
        (16.01, None, True),
        (8.0, 13.0, False),
        (7.99, 13.0, True),
        (15.0, 13.0, False),
    ],
)
def test_charges_beyond_what_is_known_are_flagged(
    charge: float, wild_type: float | None, flagged: bool
) -> None:
    mutation = parse_mutation("R5Q")
    assert mutation is not None
    one = Construct(label="R5Q", mutations=(mutation,))
    flags = plausibility_flags(one, charge, wild_type)
    assert [flag.code for flag in flags] == (["charge-implausible"] if flagged else [])


def test_mutants_are_measured_by_the_wild_types_method() -> None:
    both = [
        *(ChargeReplicate(construct="E5A", cell=f"c{i}", charge_e0=q, method="noise") for i, q in
          enumerate([10.0, 10.2])),
        *(ChargeReplicate(construct="E5A", cell=f"d{i}", charge_e0=q, method="count") for i, q in
          enumerate([12.0, 12.2, 12.1])),
    ]  # fmt: skip
    wild = [
        ChargeReplicate(construct="WT", cell=f"c{i}", charge_e0=q, method="noise")
        for i, q in enumerate([13.0, 13.2, 12.8])
    ]
    constructs = [
        construct("WT", [-40.0, -41.0, -39.0]),
        construct("E5A", [-30.0, -31.0, -29.0]),
        construct("R9Q", [-30.0, -31.0, -29.0]),
        construct("E5A/R9Q", [-20.0, -21.0, -19.0]),
    ]
    import dataclasses

    constructs[0] = dataclasses.replace(constructs[0], charge_replicates=tuple(wild))
    constructs[1] = dataclasses.replace(constructs[1], charge_replicates=tuple(both))
    rows = {row.construct: row for row in couple(campaign(constructs)).constructs}
    assert rows["E5A"].charge_source == "noise"
    assert rows["E5A"].charge_e0 == pytest.approx(10.1)
    asked = {row.construct: row for row in couple(campaign(constructs, charge_method="count")).constructs}
    assert asked["E5A"].charge_e0 == pytest.approx(12.1)
    assert asked["WT"].charge_source == "noise"  # the only one it has


def test_cells_set_aside_leave_with_curve_and_charge_and_stay_in_the_table() -> None:
    import dataclasses

    constructs = [construct("WT", [-40.0, -41.0, -39.0, -20.0], [13.0, 13.2, 12.8, 9.0])]
    constructs += [construct(label, [-30.0, -31.0, -29.0], [13.0, 13.1, 12.7]) for label in ("E5A", "R9Q")]
    constructs += [construct("E5A/R9Q", [-20.0, -21.0, -19.0], [13.0, 13.1, 12.7])]
    given = campaign(constructs)
    excluded = dataclasses.replace(
        given, exclusions=(Exclusion(construct="WT", cell="c3", reason="seal lost"),)
    )
    kept = campaign([construct("WT", [-40.0, -41.0, -39.0], [13.0, 13.2, 12.8]), *constructs[1:]])
    result, expected = couple(excluded), couple(kept)
    assert result.interactions[0].interaction == pytest.approx(expected.interactions[0].interaction)
    assert result.constructs[0].charge_e0 == pytest.approx(13.0)
    (aside,) = [row for row in result.cells if not row.used]
    assert (aside.construct, aside.cell) == ("WT", "c3")
    assert aside.reason == "set aside by the user: seal lost"
    assert aside.median_mv == pytest.approx(-20.0, abs=0.5)


def test_reference_voltage_moves_energies_by_f_q_v_and_interactions_by_f_v_j() -> None:
    per = 0.02306054783061903
    constructs = [
        construct("WT", [-40.0, -41.0, -39.0], [13.0, 13.2, 12.8]),
        construct("E5A", [-30.0, -31.0, -29.5], [13.0, 13.2, 12.9], charge_cells="n"),
        construct("R9Q", [-30.0, -32.0, -29.0], [10.0, 10.2, 9.8]),
        construct("E5A/R9Q", [-20.0, -21.0, -19.0], [9.0, 9.2, 9.3], charge_cells="n"),
    ]
    at_zero, moved = couple(campaign(constructs)), couple(campaign(constructs, reference_voltage_mv=-50.0))
    for before, after in zip(at_zero.constructs, moved.constructs, strict=True):
        assert after.energy == pytest.approx(before.energy + per * 50.0 * before.charge_e0)
    before, after = at_zero.interactions[0], moved.interactions[0]
    assert after.interaction == pytest.approx(before.interaction + per * 50.0 * before.charge_interaction_e0)
    assert after.shortcut == pytest.approx(before.shortcut)
    assert after.boot_low != before.boot_low
    assert after.boot_low == pytest.approx(after.low, abs=0.25 * (after.high - after.low))
    # the profile is the same line whatever voltage the energy is given at
    assert before.profile
    for one, other in zip(before.profile, after.profile, strict=True):
        assert one.interaction == pytest.approx(other.interaction)
        assert one.low == pytest.approx(other.low)


def test_stated_charge_carries_its_citation() -> None:
    constructs = [construct(label, [-30.0, -31.0, -29.0]) for label in ("WT", "E5A", "R9Q", "E5A/R9Q")]
    stated = StatedCharge(value_e0=13.0, sem_e0=0.2, citation="a paper, 2001")
    rows = couple(campaign(constructs, charge=stated)).constructs
    assert {row.charge_source for row in rows} == {"stated: a paper, 2001"}


def _opening(label: str, cell: str, lowest_po: float, scale: float = 1.0) -> OpeningCurve:
    scheme = LinearSequence(
        charges_e0=tuple(scale * z for z in (3.5, 3.5, 3.5, 2.5)),
        midpoints_mv=(-60.0, -50.0, -40.0, -30.0),
        temperature_c=22.0,
    )
    voltage = np.arange(-140.0, 21.0, 5.0)
    po = scheme.open_probability(voltage)
    kept = po >= lowest_po
    return OpeningCurve(construct=label, cell=cell, voltage_mv=voltage[kept], open_probability=po[kept])


def test_limiting_slope_stands_for_the_charge() -> None:
    one = Construct(label="WT", mutations=(), openings=tuple(_opening("WT", f"o{i}", 1e-7) for i in range(3)))
    (value,) = charge_values(one, 22.0)
    assert (value.method, value.kind, value.lower_bound) == ("limiting slope", "limiting slope", False)
    assert value.quantity.mean == pytest.approx(13.0, rel=0.05)


def test_a_slope_short_of_its_limit_is_flagged_as_a_bound() -> None:
    one = Construct(label="WT", mutations=(), openings=tuple(_opening("WT", f"o{i}", 1e-2) for i in range(3)))
    (value,) = charge_values(one, 22.0)
    assert value.source == "limiting slope (lower bound)"
    assert value.quantity.mean < 13.0
    assert [flag.code for flag in method_flags(one, (value,), value, 0.95)] == ["charge-lower-bound"]


def test_a_direct_measurement_goes_before_a_limiting_slope() -> None:
    openings = tuple(_opening("WT", f"o{i}", 1e-7) for i in range(5))
    one = Construct(label="WT", mutations=(), charge_replicates=NOISE, openings=openings)
    values = charge_values(one, 22.0)
    assert choose(values, None).method == "noise analysis"  # type: ignore[union-attr]
    assert choose(values, "limiting slope").method == "limiting slope"  # type: ignore[union-attr]


def test_limiting_slopes_carry_a_campaign_and_its_note() -> None:
    import dataclasses

    constructs = [construct(label, [-30.0, -31.0, -29.0]) for label in ("WT", "E5A", "R9Q", "E5A/R9Q")]
    with_slopes = [
        dataclasses.replace(
            one, openings=tuple(_opening(one.label, f"o{i}", 1e-7, 1 + 0.004 * i) for i in range(3))
        )
        for one in constructs
    ]
    result = couple(campaign(with_slopes))
    assert {row.charge_source for row in result.constructs} == {"limiting slope"}
    assert {row.charge_verdict for row in result.constructs} == {None, "equal"}
    assert any("sees only charge coupled to opening" in note for note in result.notes)


def test_open_probability_that_falls_is_refused() -> None:
    rising = _opening("WT", "o1", 1e-5)
    falling = OpeningCurve(
        construct="WT",
        cell="o1",
        voltage_mv=rising.voltage_mv,
        open_probability=rising.open_probability[::-1].copy(),
        origin=Origin(file="openings.csv", row=2),
    )
    with pytest.raises(DataRefused, match=r"openings\.csv, row 2: found open probabilities of WT/o1"):
        charge_values(Construct(label="WT", mutations=(), openings=(falling,)), 22.0)
