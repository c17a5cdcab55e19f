"""The whole computation on campaigns made in Python."""

import dataclasses
import json
import math

import numpy as np
import pytest
from builders import campaign, construct
from scipy import stats

from cornerwise.campaign import Campaign, ChargeSummary, Construct, StatedCharge
from cornerwise.coupling import couple
from cornerwise.mutations import CycleRequest
from cornerwise.result import Result

RNG = np.random.default_rng(11)


def _cells(mean: float, n: int = 6, sd: float = 1.5) -> list[float]:
    return list(RNG.normal(mean, sd, n))


def _four(double_charge: float = 13.0) -> list[Construct]:
    return [
        construct("WT", _cells(-40), _cells(13, 7, 0.4), charge_cells="n"),
        construct("E5A", _cells(-33), _cells(13, 7, 0.4), charge_cells="n"),
        construct("R9Q", _cells(-52), _cells(13, 7, 0.4), charge_cells="n"),
        construct("E5A/R9Q", _cells(-30), _cells(double_charge, 7, 0.4), charge_cells="n"),
    ]


FOUR = _four()


def _row(result: Result, cycle: str = "E5A/R9Q") -> dict:
    (row,) = [row for row in result.interactions if row.cycle == cycle]
    return dataclasses.asdict(row)


def test_interval_p_value_and_bootstrap_hang_together() -> None:
    row = _row(couple(campaign(FOUR)))
    half = stats.t.ppf(0.975, row["dof"]) * row["std_uncertainty"]
    assert row["high"] - row["interaction"] == pytest.approx(half)
    assert row["interaction"] - row["low"] == pytest.approx(half)
    t = abs(row["interaction"]) / row["std_uncertainty"]
    assert row["p_value"] == pytest.approx(2 * stats.t.sf(t, row["dof"]))
    assert row["p_adjusted"] == row["p_value"]
    assert row["boot_high"] - row["boot_low"] == pytest.approx(2 * half, rel=0.2)


def test_added_unrelated_constructs_change_no_figure_but_rank_and_adjustment() -> None:
    more = [
        construct("K70M", _cells(-35), _cells(13, 5, 0.4)),
        construct("E5A/K70M", _cells(-31), _cells(13, 5, 0.4)),
    ]
    alone, beside = _row(couple(campaign(FOUR))), _row(couple(campaign([*FOUR, *more])))
    assert beside.pop("p_adjusted") != alone.pop("p_adjusted")
    # Verdicts go by the adjusted p value; these cycles are far from the limit, so theirs stay.
    for key in ("rank", "rank_low", "rank_high", "first_probability", "shrunken"):
        alone.pop(key), beside.pop(key)
    assert alone == beside


def test_order_of_constructs_changes_no_figure() -> None:
    given = campaign(FOUR)
    turned = dataclasses.replace(given, constructs=tuple(reversed(given.constructs)))
    assert _row(couple(given)) == _row(couple(turned))


def test_same_seed_same_bytes_other_seed_other_bootstrap() -> None:
    first, again = couple(campaign(FOUR)).to_json(), couple(campaign(FOUR)).to_json()
    assert first == again
    other = _row(couple(campaign(FOUR, seed=2)))
    assert other["boot_low"] != _row(couple(campaign(FOUR)))["boot_low"]
    assert other["low"] == _row(couple(campaign(FOUR)))["low"]


@pytest.mark.parametrize(("unit", "factor"), [("kJ/mol", 4.184), ("meV", 1000 / 23.06054783061903)])
def test_energy_unit_scales_energies_and_nothing_else(unit: str, factor: float) -> None:
    kcal, other = _row(couple(campaign(FOUR))), _row(couple(campaign(FOUR, energy_unit=unit)))
    for key in ("interaction", "std_uncertainty", "low", "high", "boot_low", "shortcut", "shortcut_bias"):
        assert other[key] == pytest.approx(factor * kcal[key], rel=1e-9)
    for key in ("dof", "p_value", "interaction_verdict", "shortcut_verdict", "charge_interaction_e0"):
        assert other[key] == pytest.approx(kcal[key]) if isinstance(kcal[key], float) else kcal[key]


def test_changed_charge_is_flagged_and_invalidates_the_shortcut() -> None:
    result = couple(campaign(_four(double_charge=10.0)))
    row = _row(result)
    double = next(one for one in result.constructs if one.construct == "E5A/R9Q")
    assert double.charge_verdict == "changed"
    assert row["shortcut_verdict"] == "invalid"
    assert {"charge-shift", "charge-nonadditive"} <= set(row["flags"])
    assert row["shortcut_bias"] == pytest.approx(row["interaction"] - row["shortcut"])
    (shift,) = [flag for flag in result.flags if flag.code == "charge-shift"]
    assert f"{double.charge_ratio:.3g}" in shift.message
    (nonadditive,) = [flag for flag in result.flags if flag.code == "charge-nonadditive"]
    per_10_mv = -10 * 0.02306054783 * row["charge_interaction_e0"]
    assert f"{per_10_mv:+.2g} kcal/mol for every +10 mV" in nonadditive.message


def test_charge_never_measured_is_assumed_and_untested() -> None:
    constructs = [*FOUR[:3], construct("E5A/R9Q", _cells(-30))]
    result = couple(campaign(constructs))
    row = _row(result)
    assert row["shortcut_verdict"] == "untested"
    assert "charge-assumed" in row["flags"]
    assert row["shortcut_bias"] is None
    assert row["charge_interaction_e0"] is None
    assert row["shortcut_bias_low"] is None
    double = next(one for one in result.constructs if one.construct == "E5A/R9Q")
    assert (double.charge_source, double.charge_verdict) == ("wild type", "assumed")


def test_shared_charge_still_judges_measured_mutants() -> None:
    result = couple(campaign(_four(double_charge=10.0), charge="wild-type"))
    row = _row(result)
    assert row["interaction"] == pytest.approx(row["shortcut"])
    assert row["shortcut_verdict"] == "invalid"
    assert abs(row["shortcut_bias"]) > 1
    assert any("settings ask" in note for note in result.notes)


def test_three_cells_are_flagged_and_one_cell_gives_no_interval() -> None:
    stated = StatedCharge(value_e0=13.0, sem_e0=0.2)
    three = [construct(c.label, _cells(-40, 3)) for c in FOUR]
    row = _row(couple(campaign(three, charge=stated)))
    assert "few-cells" in row["flags"]
    assert row["low"] is not None
    one = [*three[:3], construct("E5A/R9Q", _cells(-40, 1))]
    row = _row(couple(campaign(one, charge=stated)))
    assert row["interaction"] is not None
    for key in ("std_uncertainty", "dof", "low", "high", "boot_low", "p_value", "p_adjusted", "rank"):
        assert row[key] is None, key
    assert (row["interaction_verdict"], row["favours"]) == ("unresolved", None)
    four = [construct(c.label, _cells(-40, 4)) for c in FOUR]
    assert "few-cells" not in _row(couple(campaign(four, charge=stated)))["flags"]


def _charges(label: str) -> ChargeSummary:
    return ChargeSummary(construct=label, charge_e0=13.0, sem_e0=0.3, n=4)


def test_summaries_need_no_curves() -> None:
    constructs = [
        construct(label, (-40.0 - i, 1.0, 5), _charges(label), summarised=True)
        for i, label in enumerate(one.label for one in FOUR)
    ]
    result = couple(campaign(constructs))
    assert len(result.cells) == 0
    assert list(result.cells.to_frame().columns)[:2] == ["construct", "cell"]
    assert _row(result)["dof"] > 5


def test_budget_shares_of_every_cycle_add_up() -> None:
    frame = couple(campaign(FOUR, voltage_offset_mv=1.5)).budget.to_frame()
    assert frame.groupby("cycle").share.sum().to_numpy() == pytest.approx(1.0)
    assert (frame.contribution >= 0).all()


def test_result_json_has_no_nan_and_names_its_schema() -> None:
    document = json.loads(couple(campaign(FOUR)).to_json(), parse_constant=lambda c: pytest.fail(c))
    assert document["schema"] == "cornerwise-result/2"
    assert document["settings"]["seed"] == 1
    assert document["versions"].keys() >= {"cornerwise", "numpy", "scipy", "python"}


def test_rows_are_frozen() -> None:
    row = couple(campaign(FOUR)).interactions[0]
    with pytest.raises(dataclasses.FrozenInstanceError):
        row.low = 0.0  # type: ignore[misc]


def test_mixed_protocol_and_ranges_are_flagged() -> None:
    other = dataclasses.replace(FOUR[1], curves=tuple(
        dataclasses.replace(c, holding_mv=-80.0, voltage_mv=c.voltage_mv[:-3], charge=c.charge[:-3])
        for c in FOUR[1].curves
    ))  # fmt: skip
    row = _row(couple(campaign([FOUR[0], other, *FOUR[2:]])))
    assert {"mixed-protocol", "mixed-ranges"} <= set(row["flags"])
    assert not {"mixed-protocol", "mixed-ranges"} & set(_row(couple(campaign(FOUR)))["flags"])


def _ranked(given: Campaign) -> list[tuple[int | None, float]]:
    return [(row.rank, abs(row.interaction or math.nan)) for row in couple(given).interactions]


def test_ranks_follow_strength() -> None:
    more = [
        construct("K70M", _cells(-35), _cells(13, 5, 0.4)),
        construct("E5A/K70M", _cells(-10), _cells(13, 5, 0.4)),
        construct("K70M/R9Q", _cells(-47), _cells(13, 5, 0.4)),
    ]
    ranked = sorted(_ranked(campaign([*FOUR, *more])), key=lambda pair: pair[0] or 0)
    assert [rank for rank, _ in ranked] == [1, 2, 3]
    assert [size for _, size in ranked] == sorted((size for _, size in ranked), reverse=True)


@pytest.mark.parametrize(("lone", "named"), [(5, 5), (6, 5)])
def test_constructs_in_no_cycle_are_noted(lone: int, named: int) -> None:
    """One line each up to five, which is what the survey prints, and the number of the others."""
    doubles = [f"E5A/K{70 + i}M" for i in range(lone)]
    given = campaign([*FOUR, *(construct(label, _cells(-31)) for label in doubles)])
    notes = [note for note in couple(given).notes if "no cycle" in note]
    assert notes[:named] == [f"{label}: no cycle, it lacks {label[4:]}" for label in doubles[:named]]
    assert len(notes) == named + (lone > named)
    assert lone == named or notes[-1].startswith("no cycle of 1 more construct either")


def test_constructs_left_out_of_the_cycles_asked_for_are_not_noted() -> None:
    lone = campaign([*FOUR, construct("E5A/K7M", _cells(-31))])
    asked = dataclasses.replace(lone, requests=(CycleRequest(mutations=lone.cycles[0].mutations),))
    assert any("no cycle" in note for note in couple(lone).notes)
    assert not any("no cycle" in note for note in couple(asked).notes)
