"""The command line as its user meets it."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

import cornerwise
from cornerwise.cli import app

CYCLES = Path(__file__).parents[1] / "cycles"
PUBLISHED = CYCLES / "published-medians"


def _run(*words: object) -> Result:
    return CliRunner().invoke(app, [str(word) for word in words])


def test_new_check_and_couple_work_on_each_other(tmp_path: Path) -> None:
    trial = tmp_path / "trial"
    assert _run("new", trial).exit_code == 0
    assert sorted(p.name for p in trial.iterdir()) == ["campaign.toml", "charges.csv", "curves.csv"]
    checked = _run("check", trial)
    assert checked.exit_code == 0
    assert "1 complete cycle: D171N/K232Q" in checked.stdout
    coupled = _run("couple", trial, "--out", tmp_path / "results")
    assert coupled.exit_code == 0
    assert "D171N/K232Q" in coupled.stdout
    assert "wrote result.json" in coupled.stderr
    written = sorted(p.name for p in (tmp_path / "results").iterdir())
    assert written == [
        "budget.csv", "cells.csv", "constructs.csv", "interactions.csv", "midpoints.csv", "ranking.csv",
        "report.html", "result.json", "tables",
    ]  # fmt: skip


def test_rank_in_words_and_as_json(tmp_path: Path) -> None:
    _run("new", tmp_path / "trial")
    told = _run("rank", tmp_path / "trial", "--by-lower-limit", "--first", "1")
    assert told.exit_code == 0
    assert told.stdout.splitlines()[1].split()[:2] == ["1", "D171N/K232Q"]
    assert "ranked by the lower limit of the absolute size" in told.stdout
    assert 'rank_by = "lower bound"' in told.stdout
    document = json.loads(_run("rank", tmp_path / "trial", "--json").stdout)
    assert document["schema"] == "cornerwise-ranking/1"
    (row,) = document["ranking"]
    assert (row["rank"], row["opposite_charges"]) == (1, "opposite charges")
    assert _run("rank", tmp_path / "trial", "--first", "0").exit_code == 2


def test_simulate_then_couple(tmp_path: Path) -> None:
    made, models = tmp_path / "made", Path(__file__).parents[1] / "examples" / "models"
    done = _run("simulate", models / "two_states.toml", "--out", made)
    assert done.exit_code == 0
    assert "E21A/R84Q" in done.stdout
    assert "wrote campaign.toml, curves.csv, charges.csv, 3 files in truth" in done.stderr
    assert _run("couple", made).exit_code == 0
    again = _run("simulate", made / "truth" / "model.toml", "--out", made)
    assert again.exit_code == 2
    assert "use --force" in again.stderr
    before = {p: p.read_bytes() for p in made.rglob("*.*")}
    told = _run("simulate", made / "truth" / "model.toml", "--out", made, "--force", "--json")
    assert told.exit_code == 0
    assert {p: p.read_bytes() for p in made.rglob("*.*")} == before
    document = json.loads(told.stdout)
    assert document["schema"] == "cornerwise-truth/1"
    assert document["cycles"][0]["interaction"] == pytest.approx(2.4)


def test_simulate_lists_every_problem_and_writes_nothing(tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    bad.write_text("sedd = 1\n[campaign]\nwild_type = 3\n")
    done = _run("simulate", bad, "--out", tmp_path / "made")
    assert done.exit_code == 3
    assert done.stderr.count("bad.toml") >= 3
    assert not (tmp_path / "made").exists()


def test_plan_in_words_as_json_and_as_files(tmp_path: Path) -> None:
    _run("new", tmp_path / "trial")
    told = _run("plan", tmp_path / "trial", "--half-width", "0.5", "--recordings", "12")
    assert told.exit_code == 0
    assert "Fewest further cells for a half-width of 0.5 kcal/mol" in told.stdout
    assert "Best split of 12 recordings" in told.stdout
    assert max(map(len, _run("plan", tmp_path / "trial").stdout.splitlines()[:8])) <= 80
    out = tmp_path / "out"
    done = _run("plan", tmp_path / "trial", "--out", out, "--json", "--cells", "9,12")
    document = json.loads(done.stdout)
    assert document["schema"] == "cornerwise-plan/1"
    assert {row["cycle"] for row in document["outlooks"]} == {"D171N/K232Q"}
    assert (out / "plan.json").read_text(encoding="utf-8") == done.stdout
    assert {path.name for path in out.iterdir()} == {"plan.json", "plan.csv", "needs.csv", "figures"}
    assert len(list((out / "figures").iterdir())) == 6
    again = tmp_path / "again"
    assert _run("plan", tmp_path / "trial", "--out", again, "--cells", "9,12").exit_code == 0
    for file in (path for path in out.rglob("*") if path.is_file()):
        assert file.read_bytes() == (again / file.relative_to(out)).read_bytes()


def test_plan_without_a_pilot() -> None:
    assumed = ["--median", "-40,-33,-47,-36", "--median-sd", "2.5", "--charge", "13", "--charge-sd", "0.6"]
    done = _run("plan", *assumed, "--known-from", "5", "--pairs", "2", "--charge-verdict", "equal")
    assert done.exit_code == 0
    assert "A2/B2" in done.stdout
    assert "the verdict equal on a charge with 80 % probability" in done.stdout
    for words, told in (
        ([], "assume constructs with --median, --median-sd, --charge"),
        (["--median", "much", "--median-sd", "2", "--charge", "13"], "takes numbers separated by commas"),
        ([*assumed, "--cells", "4.5"], "whole numbers"),
        ([PUBLISHED, "--median", "-40"], "leave out"),
        ([PUBLISHED, "--cycle", "A1G/B2H"], "no cycle is called"),
    ):
        refused = _run("plan", *words)
        assert refused.exit_code == 2
        assert told in refused.stderr


def test_new_keeps_what_is_there(tmp_path: Path) -> None:
    (tmp_path / "mine.txt").write_text("kept")
    done = _run("new", tmp_path)
    assert done.exit_code == 2
    assert "is not an empty folder" in done.stderr
    assert [p.name for p in tmp_path.iterdir()] == ["mine.txt"]


def test_published_cycle_as_published() -> None:
    done = _run("couple", PUBLISHED)
    assert done.exit_code == 0
    line = next(line for line in done.stdout.splitlines() if line.startswith("S411A/F433A"))
    assert "2.00 ± 0.77" in line
    assert "untested" in line


def test_json_is_the_library_result() -> None:
    done = _run("couple", PUBLISHED, "--json")
    assert done.stdout == cornerwise.couple(cornerwise.read(PUBLISHED)).to_json()
    survey = json.loads(_run("check", PUBLISHED, "--json").stdout)
    assert survey["cycles"] == ["S411A/F433A"]
    assert survey["background"] == ["V478W"]


def test_same_call_same_bytes(tmp_path: Path) -> None:
    for name in ("one", "two"):
        assert _run("couple", PUBLISHED, "--out", tmp_path / name).exit_code == 0
    assert _contents(tmp_path / "one") == _contents(tmp_path / "two")


def _contents(folder: Path) -> dict[str, bytes]:
    files = [path for path in sorted(folder.rglob("*")) if path.is_file()]
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in files}


@pytest.fixture(scope="module")
def computed(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("computed") / "results"
    assert _run("couple", CYCLES / "orvane", "--out", folder).exit_code == 0
    return folder


def test_render_writes_again_what_couple_wrote(computed: Path, tmp_path: Path) -> None:
    done = _run("render", computed / "result.json", "--out", tmp_path / "again")
    assert done.exit_code == 0
    assert done.stdout == ""
    assert "wrote result.json, interactions.csv" in done.stderr
    assert "9 files in tables" in done.stderr
    again = _contents(tmp_path / "again")
    assert again == _contents(computed)
    assert "tables/couplings.docx" in again


def test_render_computes_nothing(computed: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def never(*_: object) -> None:
        raise AssertionError("computed again")

    for place in ("coupling.measure", "coupling.EnergyBook", "coupling.interaction_rows"):
        monkeypatch.setattr(f"cornerwise.{place}", never)
    assert _run("render", computed / "result.json", "--out", tmp_path / "again").exit_code == 0


def test_render_in_another_unit_keeps_what_was_computed(computed: Path, tmp_path: Path) -> None:
    words = (
        "--unit", "kJ/mol", "--columns", "cycle, interaction,flags", "--construct-columns", "construct",
    )  # fmt: skip
    assert _run("render", computed / "result.json", "--out", tmp_path / "si", *words).exit_code == 0
    si, given = _contents(tmp_path / "si"), _contents(computed)
    assert si["result.json"] == given["result.json"]
    assert si["cells.csv"] == given["cells.csv"]
    assert b",kJ/mol," in si["interactions.csv"]
    assert "13.1 ± 1.1" in si["tables/couplings.md"].decode()
    assert "(kJ/mol)" in si["report.html"].decode()
    heads = si["tables/couplings.md"].decode().splitlines()[2]
    assert [head.strip() for head in heads.strip("|").split("|")] == ["Cycle", "*I* ± *u* (kJ/mol)", "Flags"]


def test_render_of_its_own_output_is_the_same_again(computed: Path, tmp_path: Path) -> None:
    words = ("--unit", "meV", "--group", "pair", "--digits", "one-or-two")
    assert _run("render", computed / "result.json", "--out", tmp_path / "a", *words).exit_code == 0
    assert _run("render", tmp_path / "a" / "result.json", "--out", tmp_path / "b", *words).exit_code == 0
    assert _contents(tmp_path / "a") == _contents(tmp_path / "b") != _contents(computed)


@pytest.mark.parametrize(
    ("old", "new", "found"),
    [
        ('"schema": "cornerwise-result/', '"schema": "cornerwise-result/9', "schema"),
        ('"interaction": 2.0', '"interaction": 3.0', "checksum"),
        ('"checksum": "', "", "no JSON from line"),
    ],
)
def test_render_refuses_what_couple_did_not_write(tmp_path: Path, old: str, new: str, found: str) -> None:
    text = _run("couple", PUBLISHED, "--json").stdout
    path = tmp_path / "result.json"
    path.write_text(text.replace(old, new, 1) if new else text[: text.index(old)], encoding="utf-8")
    done = _run("render", path, "--out", tmp_path / "out")
    assert done.exit_code == 3
    assert found in done.stderr
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    "words",
    ["--unit eV", "--columns cyle", "--construct-columns x", "--group x", "--digits 3"],
)
def test_render_refuses_unknown_choices(computed: Path, tmp_path: Path, words: str) -> None:
    done = _run("render", computed / "result.json", "--out", tmp_path / "out", *words.split())
    assert done.exit_code == 2
    assert "is not known" in done.stderr
    assert not (tmp_path / "out").exists()


def test_render_keeps_an_existing_folder(computed: Path) -> None:
    before = _contents(computed)
    done = _run("render", computed / "result.json", "--out", computed)
    assert done.exit_code == 2
    assert "use --force" in done.stderr
    assert _run("render", computed / "result.json", "--out", computed, "--force").exit_code == 0
    assert _contents(computed) == before


def test_refused_data_exit_3_and_write_nothing(tmp_path: Path) -> None:
    campaign = tmp_path / "campaign"
    campaign.mkdir()
    (campaign / "campaign.toml").write_text('wild_type = "WT"\ncharge = "wild-type"\nsede = 3\n')
    (campaign / "medians.csv").write_text("construct,median_mV,sem_mV,n\nWT,-40,1,5\nA1G,-900,1,1\n")
    done = _run("couple", campaign, "--out", tmp_path / "out")
    assert done.exit_code == 3
    assert done.stdout == ""
    for part in ("sede", "seed", "row 3", "-900"):
        assert part in done.stderr
    assert not (tmp_path / "out").exists()


def test_existing_output_is_usage(tmp_path: Path) -> None:
    done = _run("couple", PUBLISHED, "--out", tmp_path)
    assert done.exit_code == 2
    assert "use --force" in done.stderr
    assert done.stdout == ""
    assert _run("couple", PUBLISHED, "--out", tmp_path, "--force").exit_code == 0


@pytest.mark.parametrize("words", [["couple"], ["couple", "x", "--no-such"], ["uncouple"]])
def test_wrong_calls_exit_2(words: list[str]) -> None:
    assert _run(*words).exit_code == 2


@pytest.mark.parametrize(
    ("words", "told"),
    [
        ("plan --unit kj", "'--unit': found 'kj'; it takes kcal/mol, kJ/mol, kT, meV; did you mean kJ/mol?"),
        ("plan --unit stone", "'--unit': found 'stone'; it takes kcal/mol, kJ/mol, kT, meV"),
        ("plan --charges pared", "did you mean paired?"),
        ("plan --half-width abc", "'--half-width': 'abc' is not a number"),
        ("plan --order 2.5", "'--order': '2.5' is not a whole number"),
        ("rank trial --first 0", "'--first': must be 1 or more; found 0"),
        ("protocol --bound 0", "'--bound': must be 0.01 or more; found 0"),
        ("render result.json --out again --columns cycle;interaction", "join the columns by commas"),
    ],
)
def test_a_refused_option_is_told_in_our_own_words(words: str, told: str) -> None:
    done = _run(*words.split())
    assert done.exit_code == 2
    assert told in done.stderr
    assert "Value error" not in done.stderr
    assert "Input should" not in done.stderr


def test_an_empty_name_of_a_cycle_is_asked_for() -> None:
    done = _run("explain", PUBLISHED, "")
    assert done.exit_code == 2
    assert "give a cycle; there are " in done.stderr


def test_path_that_does_not_exist_is_refused() -> None:
    done = _run("check", "no-such-folder")
    assert done.exit_code == 3
    assert "no-such-folder" in done.stderr


@pytest.mark.parametrize("command", [[], ["new"], ["check"], ["couple"], ["render"], ["plan"]])
def test_help_shows_examples_at_80_columns(command: list[str]) -> None:
    done = _run(*command, "--help")
    assert done.exit_code == 0
    assert "For example:\n" in done.stdout
    assert max(map(len, done.stdout.splitlines())) <= 80


def test_version() -> None:
    assert _run("--version").stdout.startswith("cornerwise ")


def _process(code: str) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "PYTHONIOENCODING": "utf-8"}
    return subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, env=environment, check=False
    )


def test_help_imports_nothing_heavy() -> None:
    code = (
        "import sys\nfrom cornerwise.cli import main\nsys.argv = ['cornerwise', '--help']\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "print([m for m in ('numpy', 'pandas', 'scipy', 'statsmodels') if m in sys.modules], file=sys.stderr)"
    )
    assert _process(code).stderr.strip() == "[]"


def test_couple_imports_only_what_it_uses() -> None:
    unused = ("pandas", "scipy.stats", "scipy.optimize", "matplotlib", "openpyxl", "docx", "jinja2", "lxml")
    code = (
        "import sys\nfrom cornerwise.cli import main\n"
        f"sys.argv = ['cornerwise', 'couple', {str(PUBLISHED)!r}]\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        f"print([m for m in {unused} if m in sys.modules], file=sys.stderr)"
    )
    assert _process(code).stderr.strip() == "[]"


def test_our_own_fault_exits_1() -> None:
    code = (
        "import sys, cornerwise.coupling\nfrom cornerwise.cli import main\n"
        "def broken(*_):\n    raise RuntimeError('a wire came loose')\n"
        "cornerwise.coupling.couple = broken\n"
        f"sys.argv = ['cornerwise', 'couple', {str(PUBLISHED)!r}]\nmain()"
    )
    done = _process(code)
    assert done.returncode == 1
    assert "a wire came loose" in done.stderr
    assert "please report" in done.stderr


def test_reader_of_a_pipe_may_go_away() -> None:
    command = f"{sys.executable} -m cornerwise couple {PUBLISHED} --json | head -1; echo ${{PIPESTATUS[0]}}"
    done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, check=False)
    assert done.stdout.splitlines()[0] == "{"
    assert done.stdout.splitlines()[-1] in {"0", "141"}
    assert "Traceback" not in done.stderr


def test_files_are_written_even_if_the_reader_of_a_pipe_goes_away(tmp_path: Path) -> None:
    command = f"{sys.executable} -m cornerwise couple {PUBLISHED} --out {tmp_path / 'out'} | true"
    subprocess.run(["bash", "-c", command], capture_output=True, check=False)
    assert (tmp_path / "out" / "result.json").is_file()


def test_work_that_takes_long_is_reported_on_stderr(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("cornerwise.console._PATIENCE_S", 0.0)
    done = _run("couple", PUBLISHED)
    assert "cornerwise: interactions, 1 of 1" in done.stderr
    assert "1 of 1" not in done.stdout


def test_figures_need_a_folder_and_are_counted(tmp_path: Path) -> None:
    _run("new", tmp_path / "trial")
    refused = _run("couple", tmp_path / "trial", "--figures")
    assert refused.exit_code == 2
    assert "give --out DIR" in refused.stderr
    done = _run("couple", tmp_path / "trial", "--out", tmp_path / "out", "--figures")
    assert done.exit_code == 0
    files = [path for path in (tmp_path / "out" / "figures").rglob("*") if path.is_file()]
    assert f"{len(files)} files in figures" in done.stderr
    again = _run("render", tmp_path / "out" / "result.json", "--out", tmp_path / "again", "--figures")
    assert again.exit_code == 0
    assert _contents(tmp_path / "again") == _contents(tmp_path / "out")
    assert {path.suffix for path in files} == {".svg", ".pdf", ".png"}
