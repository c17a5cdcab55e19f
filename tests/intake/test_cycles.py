"""Cycles asked for and cycles found."""

from itertools import combinations
from pathlib import Path

import pytest

from cornerwise.intake import read
from intake.writing import LABELS, TOML, assert_refused, content, curve_rows, folder

TRIPLE = ("K95N", "E181A", "R212Q")
FULL = ("WT", *("/".join(subset) for size in (1, 2, 3) for subset in combinations(TRIPLE, size)))


def entry(mutations: str, name: str | None = None) -> str:
    return f"[[cycle]]\nmutations = {mutations}\n" + (f'name = "{name}"\n' if name else "")


def test_every_complete_cycle_is_found(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", curves=curve_rows(FULL[::-1])))
    assert [cycle.name for cycle in campaign.cycles] == [
        "K95N/E181A", "K95N/R212Q", "E181A/R212Q", "K95N/E181A/R212Q",
    ]  # fmt: skip
    assert campaign.requests == ()


def test_only_what_is_asked_for(tmp_path: Path) -> None:
    toml = TOML + entry('["R212Q", "p.(Lys95Asn)"]', "bridge")
    campaign = read(folder(tmp_path / "a", toml, curves=curve_rows(FULL)))
    assert [(cycle.name, list(map(str, cycle.mutations))) for cycle in campaign.cycles] == [
        ("bridge", ["K95N", "R212Q"])
    ]
    assert campaign.requests[0].origin.file == "campaign.toml"


def test_the_order_of_entries_does_not_matter(tmp_path: Path) -> None:
    entries = [
        entry('["K95N", "E181A", "R212Q"]', "all"),
        entry('["R212Q", "E181A"]'),
        entry('["K95N", "E181A"]'),
    ]
    one = read(folder(tmp_path / "a", TOML + "".join(entries), curves=curve_rows(FULL)))
    other = read(folder(tmp_path / "b", TOML + "".join(entries[::-1]), curves=curve_rows(FULL)))
    assert content(one) == content(other)
    assert [cycle.name for cycle in one.cycles] == ["K95N/E181A", "E181A/R212Q", "all"]


def test_an_incomplete_cycle_names_what_is_missing(tmp_path: Path) -> None:
    toml = TOML + entry('["E181A", "R212Q"]') + entry('["K95N", "E181A"]', "second")
    labels = [label for label in FULL if label not in ("K95N", "K95N/E181A")]
    path = folder(tmp_path / "a", toml, curves=curve_rows(labels))
    match = "cycle 'second' with no construct K95N, K95N/E181A; expected all 4 constructs"
    assert_refused(path, file="campaign.toml", column="cycle entry 2", match=match)


def test_no_complete_cycle(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows(("WT", "E181A", "E181A/R212Q", "K95N/D300N")))
    match = "no complete cycle .E181A/R212Q lacks R212Q; K95N/D300N lacks K95N, D300N."
    assert_refused(path, file="campaign.toml", match=match)


def test_no_double_mutant(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows(LABELS[:3]))
    assert_refused(path, file="campaign.toml", match="no construct carries two mutations or more")


@pytest.mark.parametrize(
    ("text", "match"),
    [
        (entry('["E181A"]'), "1 mutation; expected two or more"),
        ('[[cycle]]\nname = "x"\n', "no mutations; expected two or more"),
        (entry('"E181A/R212Q"'), "the text 'E181A/R212Q'; expected a list"),
        (entry('["E181A", "R212K"]'), "mutation R212K, which no construct carries.*did you mean R212Q"),
        (entry('["E181A", "D300N"]'), "mutation D300N, which no construct carries; .*correct it, or add"),
        (
            entry('["E181A", "R212Q"]') + "colour = 1\n",
            "unknown key 'colour'; expected only the keys name, mutations",
        ),
        (entry('["E181A", "R212Q"]') + "mutation = 1\n", "did you mean mutations"),
        (entry('["E181A", "R212Q"]') + "seed = 1\n", "unknown key 'seed'.*move seed above"),
        (entry('["E181A", "R212Q"]') + "name = 3\n", "the number 3; expected a name"),
    ],
)
def test_entries_that_cannot_be(text: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + text)
    assert_refused(path, file="campaign.toml", column="cycle entry 1", match=match)


@pytest.mark.parametrize(
    ("second", "match"),
    [
        (entry('["R212Q", "E181A"]', "again"), "a second cycle on E181A/R212Q"),
        (entry('["R212Q", "K95N"]', "bridge"), "a second cycle called 'bridge'"),
    ],
)
def test_cycles_are_asked_for_once(second: str, match: str, tmp_path: Path) -> None:
    toml = TOML + entry('["E181A", "R212Q"]', "bridge") + second
    path = folder(tmp_path / "a", toml, curves=curve_rows(FULL))
    assert_refused(path, file="campaign.toml", column="cycle entry 2", match=match)


def test_a_background_mutation_in_a_cycle(tmp_path: Path) -> None:
    toml = TOML.replace("WT", "K95N") + entry('["K95N", "E181A"]')
    labels = ("K95N", "K95N/E181A", "K95N/R212Q", "K95N/E181A/R212Q")
    path = folder(tmp_path / "a", toml, curves=curve_rows(labels))
    assert_refused(
        path, file="campaign.toml", column="cycle entry 1", match="K95N, which the wild type carries too"
    )


def test_a_single_table_in_place_of_entries(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + '[cycle]\nmutations = ["E181A", "R212Q"]\n')
    assert_refused(path, file="campaign.toml", column="cycle", match="use double square brackets")


def test_a_construct_with_very_many_mutations_is_no_burden(tmp_path: Path) -> None:
    many = "/".join(f"A{position}G" for position in range(1, 61))
    campaign = read(folder(tmp_path / "a", curves=curve_rows((*LABELS, many))))
    assert len(campaign.cycles) == 1
    wanted = str([f"A{position}G" for position in range(1, 61)]).replace("'", '"')
    path = folder(tmp_path / "b", TOML + entry(wanted, "huge"), curves=curve_rows((*LABELS, many)))
    assert_refused(
        path,
        file="campaign.toml",
        column="cycle entry 1",
        match=f"fewer than the {2**60} constructs it needs",
    )
