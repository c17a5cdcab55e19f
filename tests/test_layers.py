"""Data flow one way: a room imports only from rooms on lower floors, and libraries stay where they belong."""

import ast
from pathlib import Path

import pytest

import cornerwise

FLOORS = [
    {"errors", "flags", "units", "streams"},
    {"folders", "intervals", "mutations", "plausible", "opening_schemes", "side_chains"},
    {"campaign", "gating", "limiting_slope", "quantities", "ranking"},
    {"median", "charges"},
    {"measurements"},
    {"sources"},
    {"ledger", "blocks"},
    {"batches"},
    {"energies"},
    {"interactions", "midpoints"},
    {"estimates"},
    {"standings", "verdicts"},
    {"charge_judgement"},
    {"tables"},
    {"rows", "plan_rows", "simulation"},
    {"result", "columns", "protocols"},
    {"result_reading"},
    {"result_schema"},
    {"charge_trace"},
    {"construct_rows", "interaction_rows", "backgrounds", "planning"},
    {"coupling", "surveying"},
    {"unit_change"},
    {"intake", "render", "starter"},
    {"console", "formats", "process"},
    {"plan_command", "design_commands"},
    {"cli"},
    {"__main__"},
]
FLOOR_OF = {room: floor for floor, rooms in enumerate(FLOORS) for room in rooms}

ALLOWED = {
    "pandas": {"result", "tables"},  # for to_frame, on demand
    "openpyxl": {"render"},
    "docx": {"render"},
    "gemmi": {"intake"},  # on demand
    "rich": {"render"},
    "typer": {"cli", "console", "plan_command", "design_commands"},
    "matplotlib": {"render"},
    "fontTools": {"render"},
    "jinja2": {"render"},
    "markupsafe": {"render"},
}

SOURCE = Path(cornerwise.__file__).parent
FILES = sorted(path for path in SOURCE.rglob("*.py") if path.name != "__init__.py" or path.parent != SOURCE)


def _room(path: Path) -> str:
    return path.relative_to(SOURCE).parts[0].removesuffix(".py")


def _imports(path: Path, source: Path = SOURCE) -> list[tuple[str, str]]:
    """Pairs of ("room" or "library", name) for every import in a file, hidden ones too."""
    package = ["cornerwise", *path.relative_to(source).parts[:-1]]
    found = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names = [alias.name.split(".") for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = package[: len(package) - node.level + 1] if node.level else []
            module = [*base, *(node.module.split(".") if node.module else [])]
            names = (
                [module]
                if len(module) > 1 or module[0] != "cornerwise"
                else [[*module, alias.name] for alias in node.names]
            )
        else:
            continue
        found += [
            ("room", parts[1]) if parts[0] == "cornerwise" else ("library", parts[0]) for parts in names
        ]
    return found


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(SOURCE)))
def test_imports_come_from_below(path: Path) -> None:
    room = _room(path)
    assert room in FLOOR_OF, f"{room} has no floor: give it one in this file and in DEVELOPERS.md"
    for kind, name in _imports(path):
        if kind == "room" and name != room and name in FLOOR_OF:
            assert FLOOR_OF[name] < FLOOR_OF[room], f"{room} may not import {name}"
        if kind == "library" and name in ALLOWED:
            assert room in ALLOWED[name], f"{name} does not belong in {room}"


def test_a_hidden_import_is_seen(tmp_path: Path) -> None:
    file = tmp_path / "units.py"
    file.write_text("def f():\n    from .cli import main\n    import pandas\n")
    assert _imports(file, tmp_path) == [("room", "cli"), ("library", "pandas")]


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(SOURCE)))
def test_rooms_stay_small(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert text.count("\n") <= 400, "split it by duty"
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef):
            body = [
                n for n in node.body if not (isinstance(n, ast.Expr) and isinstance(n.value, ast.Constant))
            ]
            length = (node.end_lineno or 0) - body[0].lineno + 1 if body else 0
            assert length <= 55, f"{node.name} is {length} lines long"


def test_every_floor_is_in_the_guide() -> None:
    guide = (Path(__file__).parents[1] / "DEVELOPERS.md").read_text(encoding="utf-8")
    assert [room for room in FLOOR_OF if f"`{room}`" not in guide] == []
