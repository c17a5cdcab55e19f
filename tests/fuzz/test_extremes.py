"""Whatever is read can be computed, told, drawn and read back, however odd the numbers are."""

import io
from collections.abc import Mapping
from pathlib import Path

import pytest

import cornerwise
from cornerwise.planning.plan import plan
from cornerwise.render.explanation import explain
from cornerwise.render.files import output_files
from cornerwise.render.plan_files import plan_files
from cornerwise.render.terminal import print_result
from cornerwise.result_reading import read_result
from fuzz.readers import CHARGES, CURVES, LABELS, MEASURED, REPLICATES, STATED, VOLTAGES

POINTS = list(zip(VOLTAGES, CHARGES, strict=True))


def _text(header: str, *rows: tuple[object, ...]) -> bytes:
    return "\n".join([header, *(",".join(map(str, row)) for row in rows), ""]).encode()


def _curves(power: str) -> bytes:
    cells = [(label, f"c{i}") for label in LABELS for i in (1, 2)]
    rows = [(*cell, v, f"{q}{power}") for cell in cells for v, q in POINTS]
    return _text("construct,cell,voltage_mV,charge", *rows)


def _medians(values: tuple[float, ...], sems: tuple[float, ...], n: int) -> bytes:
    return _text("construct,median_mV,sem_mV,n", *zip(LABELS, values, sems, [n] * 4, strict=True))


def _charges(value: float) -> bytes:
    rows = [(label, f"c{i}", value) for label in LABELS for i in (1, 2)]
    return _text("construct,cell,charge_e0", *rows)


VOLTS: Mapping[str, tuple[str, bytes]] = {
    "one cell each": ("curves.csv", CURVES),
    "cells that agree": ("curves.csv", _curves("")),
    "huge charges": ("curves.csv", _curves("e250")),
    "tiny charges": ("curves.csv", _curves("e-250")),
    "far medians": ("medians.csv", _medians((500, -500, 500, -500), (1e3,) * 4, 2)),
    "sure medians": ("medians.csv", _medians((1, 2, 3, 40), (1e-300,) * 4, 1_000_000)),
    "no scatter": ("medians.csv", _medians((-1, -2, -3, -44), (0,) * 4, 2)),
    "some scatter": ("medians.csv", _medians((-1, -2, -3, -44), (0, 1, 0, 1), 5)),
}
CHARGED: Mapping[str, tuple[bytes, bytes]] = {
    "stated": (STATED, b""),
    "stated exactly": (STATED.replace(b"0.5", b"0"), b""),
    "measured": (MEASURED, REPLICATES),
    "measured once": (MEASURED, _text("construct,cell,charge_e0", *((x, "c1", 13) for x in LABELS))),
    "next to none": (MEASURED, _charges(1e-300)),
    "means that agree": (MEASURED, _text("construct,charge_e0,sem_e0,n", *((x, 13, 0, 2) for x in LABELS))),
}
FAR = "confidence = 0.999999\nreference_voltage_mV = -500\nthreshold = 1e-300\nshortcut_tolerance = 1e300\n"
SETTINGS = {
    "defaults": "",
    "Monte Carlo": 'subunits = 4\nenergy_unit = "kT"\ninterval = "monte-carlo"\nvoltage_offset_mV = 5\n',
    "far limits": FAR,
}


@pytest.mark.parametrize("settings", SETTINGS)
@pytest.mark.parametrize("charged", CHARGED)
@pytest.mark.parametrize("volts", VOLTS)
def test_odd_numbers_go_all_the_way(volts: str, charged: str, settings: str, tmp_path: Path) -> None:
    (file, table), (toml, charges) = VOLTS[volts], CHARGED[charged]
    (tmp_path / "campaign.toml").write_bytes(b"replicates = 1000\n" + SETTINGS[settings].encode() + toml)
    (tmp_path / file).write_bytes(table)
    if charges:
        (tmp_path / "charges.csv").write_bytes(charges)
    campaign = cornerwise.read(tmp_path)
    result = cornerwise.couple(campaign)
    (tmp_path / "result.json").write_text(result.to_json(), encoding="utf-8")
    assert read_result(tmp_path / "result.json").to_json() == result.to_json()
    told = io.StringIO()
    print_result(result, told)
    assert "E181A/R212Q" in told.getvalue()
    assert explain(result, "E181A/R212Q")
    assert cornerwise.survey(campaign).cycles == ("E181A/R212Q",)
    if settings == "defaults":
        assert "report.html" in output_files(result)
        assert "plan.json" in plan_files(plan(campaign))
