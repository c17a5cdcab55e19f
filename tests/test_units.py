import pytest
from reference_values import load

from cornerwise import units


def test_faraday_constant_is_codata() -> None:
    reference = load("constants")
    assert pytest.approx(reference["faraday_C_per_mol"], rel=1e-12) == units.FARADAY_C_PER_MOL


def test_one_charge_through_one_volt_in_kcal() -> None:
    reference = load("constants")
    per_volt = 1000 * units.energy_per_e0_mv("kcal/mol", 22.0)
    assert per_volt == pytest.approx(reference["faraday_kcal_per_mol_per_V"], rel=1e-12)


@pytest.mark.parametrize("celsius", ["20", "22", "25"])
def test_thermal_voltage(celsius: str) -> None:
    expected = load("constants")["recomputed_kT_per_e0_mV"][celsius]
    assert units.thermal_voltage_mv(float(celsius)) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("unit", units.ENERGY_UNITS)
@pytest.mark.parametrize("target", units.ENERGY_UNITS)
def test_conversion_there_and_back(unit: units.EnergyUnit, target: units.EnergyUnit) -> None:
    there = units.convert_energy(1.7, unit, target, 18.0)
    assert units.convert_energy(there, target, unit, 18.0) == pytest.approx(1.7, rel=1e-14)


def test_only_kt_depends_on_temperature() -> None:
    ratios = {u: units.energy_per_e0_mv(u, 37.0) / units.energy_per_e0_mv(u, 0.0) for u in units.ENERGY_UNITS}
    assert ratios.pop("kT") == pytest.approx(273.15 / 310.15)
    assert set(ratios.values()) == {1.0}


def test_unknown_unit_is_refused() -> None:
    with pytest.raises(ValueError, match="use one of kcal/mol"):
        units.energy_per_e0_mv("eV", 20.0)  # type: ignore[arg-type]
