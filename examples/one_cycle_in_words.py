"""Put one cycle into words: what was measured, what was assumed, why these verdicts, what would change them.

Run from the top folder: python examples/one_cycle_in_words.py
Its output is kept in examples/one_cycle_in_words.txt. Orvane and its residues are invented.
"""

import textwrap
from pathlib import Path

import cornerwise

result = cornerwise.couple(cornerwise.read(Path(__file__).parents[1] / "cycles" / "orvane"))
for paragraph in cornerwise.explain(result, "E154Q/R223Q").split("\n\n"):
    print(textwrap.fill(paragraph, 100), end="\n\n")
