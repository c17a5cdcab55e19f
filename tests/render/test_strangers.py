"""``--force`` replaces what the commands wrote and nothing else."""

from pathlib import Path

import pytest
from builders import campaign, construct

from cornerwise.coupling import couple
from cornerwise.errors import UsageError
from cornerwise.folders import write_folder
from cornerwise.planning.plan import plan
from cornerwise.render.figures.files import curve_files
from cornerwise.render.files import output_files
from cornerwise.render.plan_files import plan_files
from cornerwise.render.strangers import refuse_strangers
from cornerwise.starter import new_campaign
from cornerwise.surveying import survey


@pytest.fixture(scope="module")
def outputs() -> dict[str, dict[str, str | bytes]]:
    cells = [-40.0, -41.0, -39.0]
    pair = campaign(
        [construct(label, cells, [13.0, 12.9, 13.1]) for label in ("WT", "E5A", "R9Q", "E5A/R9Q")]
    )
    return {
        "couple": output_files(couple(pair), figures=True),
        "check": {**curve_files(survey(pair))},
        "plan": plan_files(plan(pair)),
    }


@pytest.mark.parametrize("command", ["couple", "check", "plan"])
def test_every_output_may_be_replaced(
    command: str, outputs: dict[str, dict[str, str | bytes]], tmp_path: Path
) -> None:
    folder = tmp_path / "out"
    refuse_strangers(folder)
    write_folder(outputs[command], folder)
    (folder / ".DS_Store").touch()
    refuse_strangers(folder)
    (folder / "notes.txt").write_text("mine")
    with pytest.raises(UsageError, match=r"did not write \(notes\.txt\), which --force would delete"):
        refuse_strangers(folder)


@pytest.mark.parametrize(
    "name", ["figures/mine.txt", "tables/mine.csv", "data/curves.svg", "result.json.bak"]
)
def test_files_of_the_users_own(name: str, tmp_path: Path) -> None:
    (tmp_path / name).parent.mkdir(exist_ok=True)
    (tmp_path / name).touch()
    with pytest.raises(UsageError, match=Path(name).name):
        refuse_strangers(tmp_path)


def test_a_campaign_is_never_replaced_unless_it_was_simulated(tmp_path: Path) -> None:
    new_campaign(tmp_path / "trial")
    with pytest.raises(UsageError, match=r"\(campaign\.toml, charges\.csv, curves\.csv\)"):
        refuse_strangers(tmp_path / "trial")
    (tmp_path / "trial" / "truth").mkdir()
    (tmp_path / "trial" / "truth" / "model.toml").touch()
    refuse_strangers(tmp_path / "trial")


def test_many_are_counted(tmp_path: Path) -> None:
    for number in range(5):
        (tmp_path / f"{number}.txt").touch()
    with pytest.raises(UsageError, match=r"\(0\.txt, 1\.txt, 2\.txt and 2 more\)"):
        refuse_strangers(tmp_path)
