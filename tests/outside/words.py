"""Rounding, labels and facts of the trade."""

from functools import partial
from itertools import product

import numpy as np
from outside.record import PRACTICE, Check
from reference_values import load

from cornerwise import plausible, units
from cornerwise.mutations import Mutation, opposite_charges, parse_mutation
from cornerwise.render.rounding import with_uncertainty

RECALLED = load("recalled")
THREE_LETTER: dict[str, str] = RECALLED["three_letter"]


def _one_letter_codes() -> str:
    """Each three-letter code read as the native residue of a substitution."""
    codes = []
    for three in THREE_LETTER.values():
        found = parse_mutation(f"p.({three}7{'Ala' if three == 'Gly' else 'Gly'})")
        codes.append(str(found.native) if found is not None else "?")
    return "".join(codes)


def _pairs(kind: str) -> str:
    """Pairs of native residues, acid first, of this kind."""
    found = []
    for a, b in product(THREE_LETTER, repeat=2):
        pair = [Mutation(f"{native}{place}G", place, native, "G") for place, native in ((1, a), (2, b))]
        if opposite_charges(pair) == kind:
            found.append("".join(sorted((a, b))))
    return " ".join(sorted(set(found)))


ROUNDING = [
    *(
        Check(
            what=f"{value!r} with a standard uncertainty of {u!r}",
            source="GUM 7.2",
            expected=text,
            obtained=partial(with_uncertainty, value, u),
            why="two significant digits of the uncertainty, the value to the same decimal; the document "
            "writes units, and no ±",
            standing="memory",
        )
        for text, (value, u) in RECALLED["rounding"].items()
    ),
]

LABELS = [
    Check(
        what="one-letter codes of the 20 amino acids read in three letters",
        source="IUPAC-IUB 1983",
        expected="".join(THREE_LETTER),
        obtained=_one_letter_codes,
        why="letters",
        standing="memory",
    ),
]

TRADE = [
    Check(
        what="kT/e0 at room temperature (20 °C) is about 25 mV",
        source=PRACTICE,
        expected=25.0,
        obtained=lambda: units.thermal_voltage_mv(20.0),
        within=0.5,
        form=".2f",
        why="a round number",
        standing="practice",
    ),
    Check(
        what="a factor of ten in an equilibrium constant is 1.36 kcal/mol at 25 °C",
        source=PRACTICE,
        expected=1.36,
        obtained=lambda: float(units.convert_energy(np.log(10.0), "kT", "kcal/mol", 25.0)),
        within=0.005,
        form=".4f",
        why="three digits",
        standing="practice",
    ),
    Check(
        what="pairs of native residues that can be a salt bridge",
        source=PRACTICE,
        expected="DK DR EK ER",
        obtained=lambda: _pairs("opposite charges"),
        why="acid with base; no claim of a contact",
        standing="practice",
    ),
    Check(
        what="pairs that can be one where histidine is charged",
        source=PRACTICE,
        expected="DH EH",
        obtained=lambda: _pairs("opposite charges with histidine"),
        why="depends on the pH",
        standing="practice",
    ),
    Check(
        what="membranes are clamped from -250 to +250 mV: refused voltages",
        source=PRACTICE,
        expected=0,
        obtained=lambda: sum(abs(v) > plausible.VOLTAGE_LIMIT_MV for v in range(-250, 251, 50)),
        form="d",
        why="a voltage beyond ±500 mV is refused as a slip of the unit; no membrane bears it",
        standing="practice",
    ),
]
