"""The line of every key, however the file is laid out."""

import tomllib
from pathlib import Path

from hypothesis import given, settings
from hypothesis import strategies as st

from cornerwise.intake.toml_lines import LONGEST_STATEMENT, lines_of_keys
from intake.writing import TOML, assert_refused, folder

LAID_OUT = '''# seed = 1 in a comment
title = """seed = 2
# [mutations]
[[cycle]]"""   # the end of the text

"wild_type" = 'a "key = 1" \\'
charge = { value_e0 = 13.0, sem_e0 = 0.5 }
x.y = 1
x.z = [
  "[seed]",  # ]
  "]",
]

[mutations]   # a table
"A = B" = [
  "E181A",
]
C = []
[[cycle]]
name = "one"
[ [cycle] ]
'''.replace("[ [cycle] ]", "[[ cycle ]]")


def test_every_layout() -> None:
    tomllib.loads(LAID_OUT)
    assert lines_of_keys(LAID_OUT) == {
        ("title",): 2,
        ("wild_type",): 6,
        ("charge",): 7,
        ("charge", "value_e0"): 7,
        ("charge", "sem_e0"): 7,
        ("x",): 8,
        ("x", "y"): 8,
        ("x", "z"): 9,
        ("mutations",): 14,
        ("mutations", "A = B"): 15,
        ("mutations", "C"): 18,
        ("cycle", 0): 19,
        ("cycle", 0, "name"): 20,
        ("cycle", 1): 21,
    }


def test_tables_inside_entries() -> None:
    text = "[[a]]\n[a.b]\nc = 1\n[[a.d]]\n[[a]]\n[a.b]\n[charge]\nvalue_e0 = 1\nd = [{e = 1}, 2]\n"
    assert lines_of_keys(text) == {
        ("a", 0): 1, ("a", 0, "b"): 2, ("a", 0, "b", "c"): 3, ("a", 0, "d", 0): 4, ("a", 1): 5,
        ("a", 1, "b"): 6, ("charge",): 7, ("charge", "value_e0"): 8, ("charge", "d"): 9,
        ("charge", "d", 0): 9, ("charge", "d", 0, "e"): 9,
    }  # fmt: skip


def test_a_very_long_statement_leaves_the_rest_without_lines() -> None:
    long = "a = 1\nb = [\n" + "1,\n" * LONGEST_STATEMENT + "]\nc = 2\n"
    assert lines_of_keys(long) == {("a",): 1}


keys = st.text("abcdef", min_size=1, max_size=4)
values = st.sampled_from(["1", '"x # [y]"', "[\n 1,\n 2 ]", '"""\na = 1\n"""', "'''\n[t]\n'''", "{ q = 1 }"])


@settings(max_examples=100, deadline=None)
@given(
    st.dictionaries(keys, values, max_size=6), st.lists(st.sampled_from(["", "# a = 1", "  "]), max_size=3)
)
def test_a_line_begins_with_its_key(statements: dict[str, str], between: list[str]) -> None:
    text = "".join("".join(f"{line}\n" for line in between) + f"{k} = {v}\n" for k, v in statements.items())
    lines, found = text.split("\n"), lines_of_keys(text)
    assert {path[0] for path in found} == set(statements)
    assert all(lines[found[key,] - 1].startswith(f"{key} = ") for key in statements)


def test_a_fault_of_the_settings_names_its_line(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", '# a note\ntitle = """one \\\nline"""\n' + TOML + "seed = -1\n")
    assert_refused(path, file="campaign.toml", row=6, column="seed", match="row 6, key seed: found")


def test_a_missing_key_is_told_at_its_table(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", 'wild_type = "WT"\n\n[charge]\nvalue_e0 = 13.0\n')
    assert_refused(path, file="campaign.toml", row=3, column="charge sem_e0", match="no sem_e0")
