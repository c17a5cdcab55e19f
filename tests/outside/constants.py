"""Constants and units."""

from functools import partial

from outside.record import Check
from reference_values import load

from cornerwise import units

C = load("constants")
_EXACT = partial(
    Check, source="CODATA 2022", within=C["tolerance"], relative=True, why=C["tolerance_reason"], form=".10g"
)
_WORKED_OUT = partial(
    _EXACT, standing="recomputed", why="exact numbers multiplied; printed to 10 digits here"
)

CHECKS = [
    _EXACT(
        what="Faraday constant, C/mol",
        expected=C["faraday_C_per_mol"],
        obtained=lambda: units.FARADAY_C_PER_MOL,
        why="exact by definition of the SI. The package takes its constants from scipy, where this was read: "
        "the check guards against another edition or a slip, not against scipy",
    ),
    _EXACT(
        what="gas constant, J/mol/K, as kT in kJ/mol over the temperature",
        expected=C["gas_constant_J_per_mol_K"],
        obtained=lambda: 1000 * units.convert_energy(1.0, "kT", "kJ/mol", 22.0) / units.kelvin(22.0),
    ),
    _EXACT(
        what="Boltzmann constant, eV/K, as kT in meV over the temperature",
        expected=C["boltzmann_eV_per_K"],
        obtained=lambda: units.convert_energy(1.0, "kT", "meV", 22.0) / 1000 / units.kelvin(22.0),
    ),
    _EXACT(
        what="calorie, J, as 1 kcal/mol in kJ/mol",
        source="scipy.constants",
        expected=C["joule_per_calorie"],
        obtained=lambda: units.convert_energy(1.0, "kcal/mol", "kJ/mol", 22.0),
        why="the thermochemical calorie, exact by definition; the international-table one is 4.1868 J",
    ),
    _EXACT(
        what="0 degrees Celsius in K",
        source="scipy.constants",
        expected=C["zero_celsius_K"],
        obtained=lambda: units.kelvin(0.0),
        why="exact by definition",
    ),
    _WORKED_OUT(
        what="one elementary charge through 1 V, kcal/mol",
        expected=C["recomputed_faraday_kcal_per_mol_per_V"],
        obtained=lambda: 1000 * units.energy_per_e0_mv("kcal/mol", 22.0),
    ),
    _WORKED_OUT(
        what="elementary charges in 1 fC",
        expected=C["recomputed_e0_per_fC"],
        obtained=lambda: units.elementary_charges("fC"),
    ),
    *(
        _WORKED_OUT(
            what=f"kT/e0 at {celsius} °C, mV",
            expected=expected,
            obtained=partial(units.thermal_voltage_mv, float(celsius)),
        )
        for celsius, expected in C["recomputed_kT_per_e0_mV"].items()
    ),
    *(
        _WORKED_OUT(
            what=f"RT at {celsius} °C, kcal/mol",
            expected=expected,
            obtained=partial(units.convert_energy, 1.0, "kT", "kcal/mol", float(celsius)),
        )
        for celsius, expected in C["recomputed_RT_kcal_per_mol"].items()
    ),
]
