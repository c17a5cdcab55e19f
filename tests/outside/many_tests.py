"""p values adjusted for looking at many pairs."""

from collections.abc import Sequence
from functools import partial

from outside.record import Check
from reference_values import load

from cornerwise.intervals import Adjustment, adjusted_p_values

MANY = load("holm_bh")
METHODS: dict[str, tuple[Adjustment, str]] = {
    "holm": ("holm", "Holm"),
    "bh": ("benjamini-hochberg", "Benjamini-Hochberg"),
}


def _adjusted(p: Sequence[float], method: Adjustment) -> tuple[float, ...]:
    return tuple(adjusted_p_values(p, method))


def _rejected(p: Sequence[float], method: Adjustment) -> tuple[int, ...]:
    return tuple(int(adjusted < 0.05) for adjusted in adjusted_p_values(p, method))


CHECKS = [
    *(
        Check(
            what=f"{words}, {name}",
            source="R multtest",
            expected=tuple(table[key]),
            obtained=partial(_adjusted, table["p"], method),
            within=MANY["tolerance"],
            relative=True,
            form=".4g",
            why=MANY["tolerance_reason"],
        )
        for words, table in MANY["tables"].items()
        for key, (method, name) in METHODS.items()
    ),
    Check(
        what="15 p values, Benjamini-Hochberg",
        source="Benjamini & Hochberg 1995",
        expected=tuple(MANY["bh1995"]["bh"]),
        obtained=partial(_adjusted, MANY["bh1995"]["p"], "benjamini-hochberg"),
        within=MANY["tolerance"],
        form=".4g",
        why=MANY["tolerance_reason"],
    ),
    Check(
        what="15 p values: how many are rejected at 5 %",
        source="Benjamini & Hochberg 1995",
        expected=MANY["bh1995"]["rejected_at_5_percent"],
        obtained=lambda: sum(_rejected(MANY["bh1995"]["p"], "benjamini-hochberg")),
        form="d",
        why="a count",
    ),
    Check(
        what="8 p values, Benjamini-Hochberg",
        source="TileStats",
        expected=tuple(MANY["tilestats"]["bh"]),
        obtained=partial(_adjusted, MANY["tilestats"]["p"], "benjamini-hochberg"),
        within=5e-4,
        form=".4f",
        why="printed to three decimals; 0.0816 and 0.13467 are 0.082 and 0.135 there",
    ),
    Check(
        what="7 p values, Holm, which are rejected at 5 % (1) and which are not (0)",
        source="HDLSSkST",
        expected=tuple(MANY["flags"]["rejected"]),
        obtained=partial(_rejected, MANY["flags"]["p"], "holm"),
        form="d",
        why="the second has an adjusted p value of exactly 0.05: it is not rejected there nor in this row, "
        "while a verdict here asks for at most 0.05 and would let it pass",
    ),
]
