import pytest

from cornerwise import units


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
