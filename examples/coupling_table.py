"""Compute a campaign and look at its tables as data frames.

Run from the top folder: python examples/coupling_table.py
Its output is kept in examples/coupling_table.txt. Orvane and its residues are invented.
"""

from pathlib import Path

import cornerwise

campaign = cornerwise.read(Path(__file__).parents[1] / "cycles" / "orvane")
result = cornerwise.couple(campaign)

interactions = result.to_frame().sort_values("rank")
columns = ["cycle", "interaction", "std_uncertainty", "low", "high", "shortcut_verdict"]
print(interactions[columns].round(2).to_string(index=False))

# Which measurement does the uncertainty of the strongest interaction come from?
strongest = interactions["cycle"].iloc[0]
budget = result.budget.to_frame()
print(f"\nWhere the uncertainty of {strongest} comes from:")
print(budget[budget["cycle"] == strongest][["source", "share"]].round(2).to_string(index=False))

# Median voltages alone would have been wrong here, and by how much:
invalid = interactions[interactions["shortcut_verdict"] == "invalid"]
print("\nWhere the shortcut is invalid:")
print(invalid[["cycle", "shortcut", "shortcut_bias"]].round(2).to_string(index=False))
