"""What is true of a simulated campaign, as a person reads it."""

from __future__ import annotations

from typing import IO

from rich.text import Text

from ..simulation import Truth
from .legend import CAUTION, formula, sign_sentences
from .rounding import number
from .terminal import plain_grid, screen_on, show_grid


def print_truth(truth: Truth, stream: IO[str]) -> None:
    """Constructs and cycles with their true values.

    Parameters
    ----------
    truth : Truth
        What `cornerwise.truth_of` returned.
    stream : text stream
        At a terminal the tables are fitted to its width; elsewhere the text is plain and never cut.
    """
    unit = truth.constructs[0].energy_unit
    constructs = plain_grid(
        [("construct", False), ("Vm (mV)", True), ("Q (e0)", True), (f"dG ({unit})", True)]
    )
    for row in truth.constructs:
        values = (number(row.median_mv, 2), number(row.charge_e0, 3), number(row.energy, 3))
        constructs.add_row(Text(row.construct), *map(Text, values))
    cycles = plain_grid([("cycle", False), (f"I ({unit})", True), ("shortcut", True), ("J (e0)", True)])
    for cycle in truth.cycles:
        values = (number(cycle.interaction, 3), number(cycle.shortcut, 3),
                  number(cycle.charge_interaction_e0, 3))  # fmt: skip
        cycles.add_row(Text(cycle.cycle), *map(Text, values))
    legend = [
        f"True values of the simulated campaign, in {unit} per channel, from the states of the model",
        formula(),
        *sign_sentences({cycle.order for cycle in truth.cycles}),
        CAUTION,
    ]
    with screen_on(stream) as screen:
        for grid in (constructs, cycles):
            show_grid(screen, grid)
            screen.print()
        for line in legend:
            screen.print(Text(line))
