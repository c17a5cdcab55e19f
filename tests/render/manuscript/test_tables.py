"""What stands in the tables: rounded together, from full precision, with its footnotes."""

import re
from dataclasses import replace
from pathlib import Path

import pytest
from manuscript_example import ASIDE, CYCLES, LABELS, hostile_tables_campaign

import cornerwise
from cornerwise.errors import UsageError
from cornerwise.flags import FLAG_CODES
from cornerwise.render.manuscript.constructs import RECIPES as CONSTRUCT_RECIPES
from cornerwise.render.manuscript.constructs import construct_table
from cornerwise.render.manuscript.couplings import RECIPES as COUPLING_RECIPES
from cornerwise.render.manuscript.couplings import coupling_table
from cornerwise.render.manuscript.document import ManuscriptTable
from cornerwise.render.manuscript.flag_words import FLAG_WORDS
from cornerwise.render.manuscript.options import TableOptions
from cornerwise.render.manuscript.words import Run, plain, printable, words
from cornerwise.result import Result
from cornerwise.unit_change import in_unit

CYCLES_FOLDER = Path(__file__).parents[3] / "cycles"
ALL_COUPLING = [recipe.key for recipe in COUPLING_RECIPES]
ALL_CONSTRUCT = [recipe.key for recipe in CONSTRUCT_RECIPES]
EVERYTHING = TableOptions(columns=ALL_COUPLING, construct_columns=ALL_CONSTRUCT)


@pytest.fixture(scope="module")
def result() -> Result:
    return cornerwise.couple(hostile_tables_campaign())


@pytest.fixture(scope="module")
def orvane() -> Result:
    return cornerwise.couple(cornerwise.read(CYCLES_FOLDER / "orvane"))


def _column(table: ManuscriptTable, key: str) -> list[str]:
    place = [column.key for column in table.columns].index(key)
    return [row[place].text for _, row in table.rows()]


def _notes(table: ManuscriptTable) -> str:
    return " ".join(plain(text) for text in table.paragraphs())


def test_the_published_cycle_as_it_is_quoted() -> None:
    published = cornerwise.couple(cornerwise.read(CYCLES_FOLDER / "published-medians"))
    table = coupling_table(published, TableOptions())
    assert _column(table, "interaction") == ["2.00 ± 0.77"]
    assert _column(table, "interval") == ["0.33 to 3.67"]
    assert "batches" not in [column.key for column in table.columns]
    notes = _notes(table)
    assert "Background of every construct: V478W." in notes
    assert "One total gating charge of 13.6 e0 per channel" in notes


@pytest.mark.parametrize("digits", ["two", "one-or-two"])
@pytest.mark.parametrize("unit", ["kcal/mol", "kJ/mol", "kT", "meV"])
def test_value_uncertainty_and_interval_share_decimals(orvane: Result, unit: str, digits: str) -> None:
    options = TableOptions(columns=["interaction", "interval", "bootstrap", "shortcut"], digits=digits)
    table = coupling_table(in_unit(orvane, unit), options)
    assert len(list(table.rows())) == len(orvane.interactions)
    for _, row in table.rows():
        numbers = re.findall(r"\d+(?:\.\d+)?", " ".join(cell.text for cell in row))
        assert len({len(number.partition(".")[2]) for number in numbers}) == 1


def test_texts_are_rounded_once_from_full_precision(orvane: Result) -> None:
    """Formed again here, by decimal arithmetic on the exact value of each float."""
    from decimal import ROUND_HALF_EVEN, Decimal

    table = coupling_table(in_unit(orvane, "kJ/mol"), TableOptions(columns=["interaction", "interval"]))
    for _, (interaction, interval) in table.rows():
        value, uncertainty, *limits = map(Decimal, (*interaction.values, *interval.values))
        exponent = Decimal(f"{uncertainty:.1e}").adjusted() - 1
        step = Decimal(1).scaleb(exponent)
        shown = [
            f"{one.quantize(step, ROUND_HALF_EVEN):f}".replace("-", "−")
            for one in (value, uncertainty, *limits)
        ]
        assert interaction.text == f"{shown[0]} ± {shown[1]}"
        assert interval.text == f"{shown[2]} to {shown[3]}"


def test_values_behind_the_texts_are_those_of_the_result(orvane: Result) -> None:
    table = coupling_table(orvane, TableOptions(columns=["cycle", "interaction", "interval", "p_adjusted"]))
    rows = {row.cycle: row for row in orvane.interactions}
    for _, cells in table.rows():
        row = rows[cells[0].text]
        assert cells[1].values == (row.interaction, row.std_uncertainty)
        assert cells[2].values == (row.low, row.high)
        assert cells[3].values == (row.p_adjusted,)


def test_another_unit_comes_from_full_precision(orvane: Result) -> None:
    kcal = coupling_table(orvane, TableOptions(columns=["interaction"]))
    joules = coupling_table(in_unit(orvane, "kJ/mol"), TableOptions(columns=["interaction"]))
    assert plain(joules.columns[0].unit) == "kJ/mol"
    for (_, (one,)), (_, (other,)) in zip(kcal.rows(), joules.rows(), strict=True):
        assert other.values == pytest.approx([4.184 * value for value in one.values], rel=1e-13)


def test_strongest_first_and_every_cycle_once(orvane: Result) -> None:
    ranked = sorted(orvane.interactions, key=lambda row: row.rank or 99)
    assert _column(coupling_table(orvane, TableOptions()), "cycle") == [row.cycle for row in ranked]


def test_by_pair_cycles_of_the_same_residues_stand_together(orvane: Result) -> None:
    first = orvane.interactions[0]
    other = replace(first, cycle="E154A/R223A", mutations=("E154A", "R223A"))
    more = replace(orvane, interactions=type(orvane.interactions)(type(first), [*orvane.interactions, other]))
    table = coupling_table(more, TableOptions(columns=["cycle"], group="pair"))
    heads = [group.head for group in table.groups]
    assert heads[:3] == ["E154 and R223", "E154 and R226", "D171 and F188"]
    groups = {group.head: [row[0].text for row in group.rows] for group in table.groups}
    assert groups["E154 and R223"] == ["E154Q/R223Q", "E154A/R223A"]
    assert groups["D171, F188 and K232"] == ["D171N/F188A/K232Q"]


def test_by_pair_each_cycle_has_its_constructs(orvane: Result) -> None:
    table = construct_table(orvane, TableOptions(construct_columns=["construct"], group="pair"))
    corners = {row.cycle: [label for label, _ in row.corners] for row in orvane.interactions}
    assert {group.head: [row[0].text for row in group.rows] for group in table.groups} == corners


def test_by_construct_a_cycle_stands_under_each_of_its_single_mutants(orvane: Result) -> None:
    table = coupling_table(orvane, TableOptions(columns=["cycle"], group="construct"))
    assert [group.head for group in table.groups][:2] == ["E154Q", "D171N"]
    for group in table.groups:
        wanted = {row.cycle for row in orvane.interactions if group.head in row.mutations}
        assert {row[0].text for row in group.rows} == wanted
    constructs = construct_table(orvane, TableOptions(group="construct"))
    heads = ["Wild type", "Single mutants", "Double mutants", "Triple mutants"]
    assert [group.head for group in constructs.groups] == heads
    assert [len(group.rows) for group in constructs.groups] == [1, 11, 10, 1]


def test_columns_come_in_the_order_they_were_asked_for(orvane: Result) -> None:
    options = TableOptions(columns=["flags", "cycle"], construct_columns=["energy", "construct"])
    assert [column.key for column in coupling_table(orvane, options).columns] == ["flags", "cycle"]
    assert [column.key for column in construct_table(orvane, options).columns] == ["energy", "construct"]


def test_every_column_can_be_shown(result: Result) -> None:
    for table in (coupling_table(result, EVERYTHING), construct_table(result, EVERYTHING)):
        for _, row in table.rows():
            assert all(cell.text for cell in row)
            assert [len(cell.values) for cell in row] == [len(column.parts) for column in table.columns]


@pytest.mark.parametrize(
    ("options", "message"),
    [
        (
            {"columns": ["cycle", "intervall"]},
            "column of the coupling table 'intervall'.*did you mean interval",
        ),
        ({"construct_columns": ["xyz"]}, "column of the construct table 'xyz' is not known; use construct, "),
    ],
)
def test_an_unknown_column_is_refused(result: Result, options: dict, message: str) -> None:
    with pytest.raises(UsageError, match=message):
        cornerwise.output_files(result, tables=TableOptions(**options))


@pytest.mark.parametrize("options", [{"group": "pairs"}, {"digits": "three"}])
def test_an_unknown_choice_is_refused(options: dict) -> None:
    with pytest.raises(UsageError, match="is not known"):
        TableOptions(**options)


def test_footnotes_carry_what_a_reader_needs(result: Result) -> None:
    notes = _notes(coupling_table(result, TableOptions()))
    for part in (
        "I = Σ s F Q Vm over the corners of a cycle",
        "I > 0: the native pair's interaction favours the resting state",
        "no proof of a contact",
        "kcal/mol per channel",
        "95 % interval: Student's t with Welch-Satterthwaite degrees of freedom",
        "adjusted for 4 cycles by Holm's method",
        "n, cells behind the median voltage of a corner",
        "N, batches (donors, days) that these cells come from",
        "beyond 1 kcal/mol on one side of 0",
        "untested, a charge was never measured",
        f"1 cell was not used: WT c3 ({ASIDE.reason}).",
        f"charge-assumed: total charge was assumed, not measured ({LABELS['E5A/K12A']}).",
    ):
        assert part in notes, part
    assert "Background" not in notes


def test_footnotes_follow_the_columns(result: Result) -> None:
    notes = _notes(coupling_table(result, TableOptions(columns=["cycle", "interaction"])))
    for part in ("Holm", "Shortcut", "batches (donors", "charge-assumed", "95 %"):
        assert part not in notes


def test_settings_reach_the_footnotes() -> None:
    given = hostile_tables_campaign(
        reference_voltage_mv=-40.0, subunits=4, energy_unit="kT", adjustment="benjamini-hochberg",
        interval="monte-carlo", confidence=0.9, charge="wild-type",
    )  # fmt: skip
    computed = cornerwise.couple(given)
    notes = _notes(coupling_table(computed, TableOptions()))
    for part in (
        "Q (Vm − V) over the corners of a cycle at V = −40 mV",
        "kT per channel at 22 °C; the channel has 4 subunits and each carries the mutations",
        "the method of Benjamini and Hochberg",
        "90 % Monte Carlo interval: Monte Carlo propagation",
        "The total gating charge of WT",
    ):
        assert part in notes, part
    assert "activation free energy at V = −40 mV" in _notes(construct_table(computed, TableOptions()))


def test_marks_in_the_table_are_those_of_the_footnotes(orvane: Result) -> None:
    table = coupling_table(orvane, TableOptions())
    marked = {note.mark: plain(note.text).partition(":")[0] for note in table.notes if note.mark}
    rows = {row.cycle: row for row in orvane.interactions}
    for cycle, letters in zip(_column(table, "cycle"), _column(table, "flags"), strict=True):
        codes = [marked[letter] for letter in letters.split() if letter != "–"]
        assert tuple(codes) == rows[cycle].flags


def test_every_flag_has_its_short_words() -> None:
    assert sorted(FLAG_WORDS) == sorted(FLAG_CODES)


def test_many_cells_set_aside_are_counted(result: Result) -> None:
    cells = [replace(cell, used=False, reason="noise") for cell in result.cells if cell.construct == "WT"]
    five = [replace(cells[0], cell=f"x{number}") for number in range(5)]
    many = replace(result, cells=type(result.cells)(type(cells[0]), [*five, replace(cells[0], reason=None)]))
    assert "6 cells were not used: WT 5 cells (noise); WT c0 (no reason stated)." in _notes(
        coupling_table(many, TableOptions())
    )


def test_without_an_uncertainty_a_value_stands_alone() -> None:
    from builders import campaign, construct

    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}
    lone = cornerwise.couple(campaign([construct(label, [m], [13.0]) for label, m in medians.items()]))
    table = coupling_table(
        lone, TableOptions(columns=["interaction", "interval", "p_adjusted", "rank", "dof"])
    )
    ((_, cells),) = table.rows()
    assert re.fullmatch(r"−?\d\.\d+", cells[0].text)
    assert [cell.text for cell in cells[1:]] == ["–"] * 4
    assert all(value is None for cell in cells[1:] for value in cell.values)


def test_labels_are_one_printable_line() -> None:
    table = coupling_table(cornerwise.couple(hostile_tables_campaign()), TableOptions(columns=["cycle"]))
    assert set(CYCLES.values()) <= set(_column(table, "cycle"))
    assert printable("a\nb\x07c\u202ed") == "a b c d"


def test_markup_of_words_is_ours_alone() -> None:
    assert words("*I* of {label}~m~", label="*a* {b} ~c~") == (
        Run("I", "italic"), Run(" of "), Run("*a* {b} ~c~"), Run("m", "subscript"),
    )  # fmt: skip
    assert plain(words("2 * 3 ~ 4")) == "2 * 3 ~ 4"
