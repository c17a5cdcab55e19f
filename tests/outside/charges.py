"""Total gating charge: what is published must not look implausible."""

from functools import partial

from builders import construct
from outside.record import Check
from reference_values import load

from cornerwise.charges import plausibility_flags

CHARGE = load("gating_charge")
LOST = CHARGE["lost_per_neutralised_sensor_charge_e0"]


def _judged(label: str, charges: tuple[float, ...], wild_type: float | None) -> str:
    one = construct(label, ())
    flags = [flag for charge in charges for flag in plausibility_flags(one, charge, wild_type)]
    return ", ".join(sorted({flag.code for flag in flags})) or "no flag"


CHECKS = [
    *(
        Check(
            what=f"total charge of {' and '.join(f'{charge:g}' for charge in charges)} e0 per channel",
            source=source,
            expected="no flag",
            obtained=partial(_judged, "WT", tuple(charges), None),
            why="the limits of the flag `charge-implausible` are ours and wider than what is published",
        )
        for source, charges in CHARGE["totals_e0"].items()
    ),
    Check(
        what=f"{LOST:g} e0 of 13.6 e0 lost with one neutralised sensor charge",
        source="Aggarwal & MacKinnon 1996",
        expected="no flag",
        obtained=lambda: _judged("R5Q", (13.6 - LOST,), 13.6),
        why="about 4 e0 are printed, the flag's limit is 5 e0 a mutation",
    ),
]
