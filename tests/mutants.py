"""Mutation testing of the rooms that do arithmetic; run by hand, see DEVELOPERS.md.

    python tests/mutants.py FOLDER [options of `mutmut run`, such as --max-children 2]

Copies the project into FOLDER and has the package ``mutmut``, which nothing else here needs, change one
operator, number or word of a room at a time and run the tests that reach it, of those listed here, which
leave out the slow ones. ``mutmut results`` in FOLDER lists the changes that no test noticed, ``mutmut show
NAME`` shows one. A property is first written as a method and an assignment in the copy, since the tool passes
over what is decorated.
"""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[1]
ROOMS = (
    "units", "quantities", "intervals", "sources", "ledger", "blocks", "batches", "energies", "interactions",
    "estimates",
)  # fmt: skip
TESTS = (*ROOMS, "coupling", "cycle_edges", "backgrounds", "outside_checks", "measurements", "verdicts")
_PROPERTY = re.compile(
    r"^(?P<indent> +)@(?P<kind>property|cached_property)\n"
    r"(?P<head> +def )(?P<name>\w+)(?P<body>\(.*\n(?:(?P=indent) .*\n|\n(?=(?P=indent) ))*)",
    re.MULTILINE,
)


def plain(code: str) -> str:
    """The code with every property as a method and an assignment.

    Examples
    --------
    >>> print(plain("class A:\\n    @property\\n    def b(self) -> int:\\n        return 1\\n"), end="")
    class A:
        def _get_b(self) -> int:
            return 1
    <BLANKLINE>
        b = property(_get_b)
    """
    return _PROPERTY.sub(
        r"\g<head>_get_\g<name>\g<body>\n\g<indent>\g<name> = \g<kind>(_get_\g<name>)\n", code
    )


def settings() -> str:
    """What the tool is told: which rooms to change, which tests to run."""
    rooms = [f"src/cornerwise/{room}.py" for room in ROOMS]
    tests = [str(path) for room in TESTS if (ROOT / (path := Path("tests") / f"test_{room}.py")).is_file()]
    beside = ["tests", "cycles", "examples", "docs", "README.md", "LICENSE"]
    return (
        f'\n[tool.mutmut]\nsource_paths = ["src"]\nonly_mutate = {rooms}\nalso_copy = {beside}\n'
        f"pytest_add_cli_args_test_selection = {tests}\n"
    )


def main() -> None:
    folder, *options = sys.argv[1:]
    copy = Path(folder)
    shutil.copytree(ROOT, copy, ignore=shutil.ignore_patterns(".*", "__pycache__", "node_modules"))
    for room in ROOMS:
        path = copy / "src" / "cornerwise" / f"{room}.py"
        path.write_text(plain(path.read_text(encoding="utf-8")), encoding="utf-8")
    with (copy / "pyproject.toml").open("a", encoding="utf-8") as file:
        file.write(settings())
    raise SystemExit(subprocess.call([sys.executable, "-m", "mutmut", "run", *options], cwd=copy))


if __name__ == "__main__":
    main()
