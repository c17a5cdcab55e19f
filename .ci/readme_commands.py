"""Run the two commands of README.md as they are written there."""

import re
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]


def commands() -> list[str]:
    """Shell blocks marked as the two commands."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    blocks = re.findall(r"<!-- command -->\n```sh\n(.*?)```", text, flags=re.DOTALL)
    if len(blocks) != 2:
        raise SystemExit(f"README.md marks {len(blocks)} commands, not 2")
    return blocks


if __name__ == "__main__":
    for command in commands():
        print(f"$ {command.strip()}", flush=True)
        code = subprocess.run(["bash", "-euo", "pipefail", "-c", command], cwd=ROOT, check=False).returncode
        if code:
            sys.exit(code)
