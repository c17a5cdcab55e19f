"""The largest memory that reading a file takes, in a process of its own."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

_READ = """
import json, resource, sys
from pathlib import Path
import cornerwise
from cornerwise.result_reading import read_result
path = Path(sys.argv[1])
try:
    read_result(path) if path.suffix == ".json" else cornerwise.read(path)
    said = ""
except cornerwise.DataRefused as refused:
    said = "\\n".join(map(str, refused.problems))
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * (1 if sys.platform == "darwin" else 1024)
print(json.dumps([said, peak]))
"""


def refused(path: Path) -> tuple[str, int]:
    """Every problem of a campaign, workbook or ``result.json``, "" if it is read; and the bytes it took."""
    done = subprocess.run(
        [sys.executable, "-c", _READ, str(path)], capture_output=True, text=True, check=True
    )
    said, peak = json.loads(done.stdout)
    return said, peak
