"""A campaign for the tests of the manuscript's tables: names that would break every format."""

from dataclasses import replace

from builders import campaign, construct
from report_example import CHARGES, MEDIANS, renamed

from cornerwise.campaign import Campaign, Exclusion

LATEX = "A_B%$#&{}~^\\"
LABELS = {
    "E5A": "=1+1",
    "R9Q": LATEX,
    "K12A": "<script>alert(1)</script>",
    "E5A/R9Q": "|a|b`c`*d*",
    "E5A/K12A": "Å Δ −5 ± é 中 \"q\" 'x' a--b,,c",
    "R9Q/K12A": "@SUM(A1)",
}
CYCLES = {"E5A/R9Q": "=1+1 | " + LATEX, "R9Q/K12A": "<b>-2+3</b>", "E5A/K12A": "-7"}
ASIDE = Exclusion(construct="WT", cell="c3", reason="seal lost & <i>found</i>")


def hostile_tables_campaign(**settings: object) -> Campaign:
    """Three pairs and a triple in two batches, a cell set aside, labels that look like markup."""
    constructs = []
    for label, m in MEDIANS.items():
        charges = {"R9Q": [0.7 * q for q in CHARGES], "E5A/K12A": None}.get(label, CHARGES)
        medians = [m - 1, m, m + 0.7, m + 1.4]
        constructs.append(construct(label, medians, charges, batches=["d1", "d1", "d2", "d2"]))
    given = replace(campaign(constructs, title="A *title* with 5 % & more", **settings), exclusions=(ASIDE,))
    return renamed(given, LABELS, CYCLES)
