"""The main table of a manuscript in another unit and with few columns, from a result alone.

Run from the top folder: python examples/manuscript_table.py
Its output is kept in examples/manuscript_table.txt. Orvane and its residues are invented.
"""

from pathlib import Path

import cornerwise

CAMPAIGN = Path(__file__).parents[1] / "cycles" / "orvane"

result = cornerwise.couple(cornerwise.read(CAMPAIGN))
options = cornerwise.TableOptions(columns=["cycle", "interaction", "interval", "verdict", "cells"])
files = cornerwise.output_files(result, unit="kJ/mol", tables=options)
print(files["tables/couplings.md"], end="")
