"""Open probability may shift by tens of mV while activation energy and charge-voltage median stay.

A gating scheme with exact curves: four steps, of which the third state's stability is changed. What it
costs to get from rest to open does not change, and the median of the charge says so; the midpoint of the
open probability does not.

Run from the top folder: python examples/shift_of_an_intermediate.py
Its output is kept in examples/shift_of_an_intermediate.txt. The numbers are invented.
"""

import numpy as np

from cornerwise.gating import LinearSequence

native = LinearSequence(
    charges_e0=(3.5, 3.5, 3.5, 2.5), midpoints_mv=(-60.0, -50.0, -40.0, -30.0), temperature_c=22.0
)
mutant = native.shift_intermediate(3, energy_mev=-100.0)

voltage = np.linspace(-150.0, 150.0, 6001)
for name, scheme in (("native", native), ("mutant", mutant)):
    half_open = float(np.interp(0.5, scheme.open_probability(voltage), voltage))
    area = float(voltage[-1] - np.trapezoid(scheme.q(voltage), voltage))
    print(
        f"{name}: activation energy {scheme.activation_energy_mev:.0f} meV, median of charge {area:.2f} mV, "
        f"half open at {half_open:.1f} mV"
    )
