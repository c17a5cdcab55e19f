"""Constants and the energy of one elementary charge across one millivolt; the only place that converts."""

from __future__ import annotations

from typing import Annotated, Literal, get_args

from scipy import constants

EnergyUnit = Literal["kcal/mol", "kJ/mol", "kT", "meV"]

ChargeUnit = Literal["fC", "pC", "nC"]

ENERGY_UNITS: tuple[EnergyUnit, ...] = get_args(EnergyUnit)

ENERGY = "energy"
EnergyNumber = Annotated[float, ENERGY]  # a field in the campaign's unit: what changes when the unit does

FARADAY_C_PER_MOL = constants.value("Faraday constant")
JOULE_PER_CALORIE = constants.calorie_th
ZERO_CELSIUS_K = constants.zero_Celsius

_COULOMB_PER_UNIT = {"fC": constants.femto, "pC": constants.pico, "nC": constants.nano}
_JOULE_PER_E0_MV = constants.elementary_charge * constants.milli


def kelvin(temperature_c: float) -> float:
    """Absolute temperature in K from a temperature in degrees Celsius."""
    return temperature_c + ZERO_CELSIUS_K


def thermal_voltage_mv(temperature_c: float) -> float:
    """Voltage kT/e0 in mV at a temperature in degrees Celsius.

    Examples
    --------
    >>> round(thermal_voltage_mv(22.0), 4)
    25.4341
    """
    return float(constants.Boltzmann * kelvin(temperature_c) / _JOULE_PER_E0_MV)


def elementary_charges(unit: ChargeUnit) -> float:
    """Number of elementary charges in one femto-, pico- or nanocoulomb.

    Raises
    ------
    ValueError
        If `unit` is none of the three.

    Examples
    --------
    >>> round(elementary_charges("fC"), 4)
    6241.5091
    """
    if unit not in _COULOMB_PER_UNIT:
        raise ValueError(f"charge unit {unit!r} is not known; use one of {', '.join(_COULOMB_PER_UNIT)}")
    return _COULOMB_PER_UNIT[unit] / constants.elementary_charge


def energy_per_e0_mv(unit: EnergyUnit, temperature_c: float) -> float:
    """Energy of moving one elementary charge through one millivolt.

    Parameters
    ----------
    unit : {"kcal/mol", "kJ/mol", "kT", "meV"}
        Energy unit; per channel in every case. The molar units are per mole of channels.
    temperature_c : float
        Temperature in degrees Celsius; only ``kT`` depends on it.

    Returns
    -------
    float
        Multiply a charge in e0 by a voltage in mV and by this to get an energy in ``unit``.

    Raises
    ------
    ValueError
        If `unit` is none of the four.

    Notes
    -----
    CODATA values from `scipy.constants`; the calorie is the thermochemical one, 4.184 J.

    Examples
    --------
    >>> round(energy_per_e0_mv("kcal/mol", 22.0), 7)
    0.0230605
    """
    match unit:
        case "meV":
            return 1.0
        case "kT":
            return 1.0 / thermal_voltage_mv(temperature_c)
        case "kJ/mol":
            return FARADAY_C_PER_MOL * constants.milli / constants.kilo
        case "kcal/mol":
            return FARADAY_C_PER_MOL * constants.milli / (constants.kilo * JOULE_PER_CALORIE)
    raise ValueError(f"energy unit {unit!r} is not known; use one of {', '.join(ENERGY_UNITS)}")


def convert_energy(value: float, unit: EnergyUnit, target: EnergyUnit, temperature_c: float) -> float:
    """Convert an energy per channel between two units at a temperature in degrees Celsius.

    Raises
    ------
    ValueError
        If either unit is not known.

    Examples
    --------
    >>> convert_energy(1.0, "kcal/mol", "kJ/mol", 22.0)
    4.184
    """
    return value * energy_per_e0_mv(target, temperature_c) / energy_per_e0_mv(unit, temperature_c)


def in_percent(fraction: float, decimals: int = 0, *, signed: bool = False) -> str:
    """Fraction as a percentage for a sentence: 0.074 is "7 %".

    Parameters
    ----------
    fraction : float
        The fraction.
    decimals : int, optional
        Decimals of the percentage.
    signed : bool, optional
        Whether a positive one carries its sign too.
    """
    return f"{100 * fraction:{'+' if signed else ''}.{decimals}f} %"
