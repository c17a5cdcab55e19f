"""The lower orders inside a cycle, consistent with the higher ones."""

import itertools

import numpy as np
import pytest
from builders import campaign, construct

from cornerwise.backgrounds import conditional_cycles
from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.result import BackgroundRow, Result

SINGLES = ("A1G", "C2S", "D3N", "E4Q")


def _result(order: int, batches: bool = False) -> Result:
    rng = np.random.default_rng(order)
    made = []
    for size in range(order + 1):
        for chosen in itertools.combinations(SINGLES[:order], size):
            days = ["day 1", "day 2"] * 2 if batches else []
            made.append(construct("/".join(chosen) or "WT", list(rng.normal(-40, 6, 4)), batches=days))
    return couple(campaign(made, charge=StatedCharge(value_e0=12.0, sem_e0=0.3)))


def _of(result: Result, cycle: str) -> dict[tuple[str, str], BackgroundRow]:
    return {
        ("/".join(row.mutations), "/".join(row.background)): row
        for row in result.backgrounds
        if row.cycle == cycle
    }


@pytest.mark.parametrize("batches", [False, True])
def test_third_order_is_a_pair_in_one_background_less_the_other(batches: bool) -> None:
    result = _result(3, batches)
    triple = next(row for row in result.interactions if row.order == 3)
    found = _of(result, triple.cycle)
    assert len(found) == 6
    for third in SINGLES[:3]:
        pair = "/".join(one for one in SINGLES[:3] if one != third)
        difference = found[pair, third].interaction - found[pair, ""].interaction
        assert difference == pytest.approx(triple.interaction, abs=1e-12)


def test_pair_in_the_wild_type_is_the_pair_of_the_main_table() -> None:
    result = _result(3)
    triple = next(row for row in result.interactions if row.order == 3)
    for row in result.interactions:
        if row.order == 2:
            same = _of(result, triple.cycle)[row.cycle, ""]
            for key in ("interaction", "std_uncertainty", "dof", "low", "high", "p_value"):
                assert getattr(same, key) == getattr(row, key), key


def test_fourth_order_at_every_level() -> None:
    result = _result(4)
    whole = next(row for row in result.interactions if row.order == 4)
    found = _of(result, whole.cycle)
    assert len(found) == 6 * 4 + 4 * 2
    for fourth in SINGLES:
        rest = [one for one in SINGLES if one != fourth]
        triple = "/".join(rest)
        difference = found[triple, fourth].interaction - found[triple, ""].interaction
        assert difference == pytest.approx(whole.interaction, abs=1e-12)
        for third in rest:
            pair = "/".join(one for one in rest if one != third)
            inside = found[pair, third].interaction - found[pair, ""].interaction
            assert inside == pytest.approx(found[triple, ""].interaction, abs=1e-12)


def test_signs_and_labels_of_a_conditional_cycle() -> None:
    triple = next(cycle for cycle in campaign([
        construct("/".join(chosen) or "WT", [-40.0])
        for size in range(4) for chosen in itertools.combinations(SINGLES[:3], size)
    ]).cycles if cycle.order == 3)  # fmt: skip
    (pair, _), (in_third, background) = [
        found
        for found in conditional_cycles(triple)
        if [str(m) for m in found[0].mutations] == ["A1G", "C2S"]
    ]
    assert [(c.label, c.sign) for c in pair.corners] == [("WT", 1), ("A1G", -1), ("C2S", -1), ("A1G/C2S", 1)]
    assert [str(m) for m in background] == ["D3N"]
    assert [(c.label, c.sign) for c in in_third.corners] == [
        ("D3N", 1), ("A1G/D3N", -1), ("C2S/D3N", -1), ("A1G/C2S/D3N", 1),
    ]  # fmt: skip


def test_pairs_have_no_backgrounds() -> None:
    assert len(_result(2).backgrounds) == 0
    assert "background" in _result(2).backgrounds.to_frame().columns
