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


def test_thermal_voltage_and_energy_in_kt() -> None:
    # k T / e at 298.15 K; k in J/K and e in C are exact in the SI (CODATA 2018, values from memory).
    kt_mv = 1.380649e-23 * 298.15 / 1.602176634e-19 * 1000
    assert units.thermal_voltage_mv(25.0) == pytest.approx(kt_mv, rel=1e-12)
    assert units.energy_per_e0_mv("kT", 25.0) == pytest.approx(1 / kt_mv, rel=1e-12)


def test_refusals_of_unknown_units_list_those_there_are() -> None:
    with pytest.raises(ValueError, match=r"use one of kcal/mol, kJ/mol, kT, meV$"):
        units.energy_per_e0_mv("eV", 20.0)  # type: ignore[arg-type]
    with pytest.raises(ValueError, match=r"^charge unit 'mC' is not known; use one of fC, pC, nC$"):
        units.elementary_charges("mC")  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("fraction", "options", "text"),
    [
        (0.074, {}, "7 %"),
        (0.5, {}, "50 %"),
        (0.5, {"signed": True}, "+50 %"),
        (-0.126, {"decimals": 1, "signed": True}, "-12.6 %"),
        (1.0, {"decimals": 1}, "100.0 %"),
    ],
)
def test_percentages_in_sentences(fraction: float, options: dict, text: str) -> None:
    assert units.in_percent(fraction, **options) == text


@pytest.mark.parametrize(("unit", "coulomb"), [("fC", 1e-15), ("pC", 1e-12), ("nC", 1e-9)])
def test_elementary_charges_in_a_unit(unit: units.ChargeUnit, coulomb: float) -> None:
    assert units.elementary_charges(unit) == pytest.approx(coulomb / 1.602176634e-19, rel=1e-12)
