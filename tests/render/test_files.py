import csv
import json
import math

import pandas as pd
import pytest
from builders import campaign, construct

from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.render.files import result_files
from cornerwise.result import Result

# Written out again, so that a changed column is noticed.
COLUMNS = {
    "interactions.csv": (
        "cycle,order,mutations,wild_type,interaction,energy_unit,std_uncertainty,dof,low,high,boot_low,"
        "boot_high,p_value,p_adjusted,shortcut,shortcut_bias,shortcut_bias_low,shortcut_bias_high,"
        "shortcut_verdict,charge_interaction_e0,charge_interaction_low,charge_interaction_high,"
        "interaction_verdict,favours,rank,rank_low,rank_high,flags"
    ),
    "constructs.csv": (
        "construct,mutations,cells,median_mV,median_sem_mV,charge_e0,charge_sem_e0,charge_n,charge_source,"
        "energy,energy_unit,std_uncertainty,dof,low,high,charge_ratio,charge_ratio_low,charge_ratio_high,"
        "charge_verdict,flags"
    ),
    "cells.csv": ("construct,cell,batch,median_mV,midpoint_mV,low_plateau,high_plateau,points,used,flags"),
    "midpoints.csv": (
        "construct,median_mV,energy,energy_unit,midpoint_mV,midpoint_energy,sigmoid_midpoint_mV,"
        "slope_charge_e0,sigmoid_energy"
    ),
    "budget.csv": "cycle,source,contribution,share",
}


@pytest.fixture(scope="module")
def result() -> Result:
    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}
    constructs = [
        construct(label, [m - 1, m, m + 0.7], None if label == "R9Q" else [13.0, 12.5, 13.3])
        for label, m in medians.items()
    ]
    return couple(campaign(constructs))


@pytest.mark.parametrize("name", COLUMNS)
def test_columns_are_exactly_these(result: Result, name: str) -> None:
    assert result_files(result)[name].splitlines()[0] == COLUMNS[name]


def test_nothing_is_rounded_and_nothing_that_does_not_apply_is_zero(result: Result) -> None:
    (row,) = csv.DictReader(result_files(result)["interactions.csv"].splitlines())
    one = result.interactions[0]
    for key in ("interaction", "std_uncertainty", "dof", "low", "boot_high", "p_value"):
        assert float(row[key]) == getattr(one, key)
    assert row["shortcut_bias"] == row["charge_interaction_e0"] == ""
    assert row["order"] == "2"
    assert row["rank"] == "1"
    assert row["flags"] == " ".join(one.flags)
    constructs = list(csv.DictReader(result_files(result)["constructs.csv"].splitlines()))
    assert [line["cells"] for line in constructs] == ["3"] * 4
    assert constructs[0]["charge_ratio"] == constructs[0]["charge_verdict"] == ""
    assert constructs[2]["charge_source"] == "wild type"


def test_only_higher_orders_have_backgrounds(result: Result) -> None:
    assert "backgrounds.csv" not in result_files(result)
    first, *rest = result_files(result)["ranking.csv"].splitlines()
    assert first.startswith("rank,cycle,interaction,energy_unit,low,high,strength_low,rank_low,rank_high")
    assert [line.split(",")[0] for line in rest] == ["1"]


def test_only_a_homomer_has_energies_per_subunit(result: Result) -> None:
    assert "per_subunit.csv" not in result_files(result)
    constructs = [construct(label, [-40.0, -41.0, -39.0]) for label in ("WT", "E5A", "R9Q", "E5A/R9Q")]
    stated = StatedCharge(value_e0=13.0, sem_e0=0.5)
    tetramer = couple(campaign(constructs, charge=stated, subunits=4))
    (row,) = csv.DictReader(result_files(tetramer)["per_subunit.csv"].splitlines())
    one = tetramer.interactions[0]
    assert float(row["interaction_per_channel"]) == one.interaction
    assert float(row["std_uncertainty_per_subunit"]) == one.std_uncertainty / 4
    assert float(row["high_per_subunit"]) == one.high / 4
    assert row["subunits"] == "4"
    assert any("divided nowhere but in per_subunit.csv" in note for note in tetramer.notes)


def test_text_is_ascii_apart_from_labels(result: Result) -> None:
    assert all(text.isascii() for name, text in result_files(result).items() if name.endswith(".csv"))


def test_csv_and_json_agree(result: Result) -> None:
    document = json.loads(result.to_json())
    frame = result.constructs.to_frame()
    for row, energy in zip(document["constructs"], frame["energy"], strict=True):
        assert row["energy"] == energy or (row["energy"] is None and math.isnan(energy))


def test_frames_have_missing_values_not_text(result: Result) -> None:
    frame = result.to_frame()
    assert list(frame.columns) == COLUMNS["interactions.csv"].split(",")
    assert pd.isna(frame["shortcut_bias"].iloc[0])


def test_the_report_is_among_the_files(result: Result) -> None:
    page = result_files(result)["report.html"]
    assert page.startswith("<!doctype html>")
    assert "Charge-voltage curves of the corners" in page
    assert (
        "Charge-voltage curves of the corners" not in result_files(result, cycle_figures=False)["report.html"]
    )
