"""The tables in each format: labels are text, numbers are numbers, the bytes are the same each time."""

import io
import re
import time
import zipfile
from dataclasses import replace
from html import unescape
from html.parser import HTMLParser

import pytest
from docx import Document
from manuscript_example import CYCLES, LABELS, LATEX, hostile_tables_campaign
from openpyxl import load_workbook
from openpyxl.worksheet.worksheet import Worksheet

import cornerwise
from cornerwise.render.figures.lettering import width_of
from cornerwise.render.manuscript import markdown
from cornerwise.render.manuscript.couplings import RECIPES, coupling_table
from cornerwise.render.manuscript.document import ManuscriptTable
from cornerwise.render.manuscript.files import manuscript_tables, table_files
from cornerwise.render.manuscript.layout import layout
from cornerwise.render.manuscript.options import TableOptions
from cornerwise.render.manuscript.words import plain
from cornerwise.result import Result

WIDE = TableOptions(
    columns=["cycle", "interaction", "interval", "bootstrap", "p_value", "p_adjusted", "favours", "verdict",
             "rank", "shortcut", "shortcut_bias", "shortcut_verdict", "charge_interaction", "flags"],
    group="construct",
)  # fmt: skip


@pytest.fixture(scope="module")
def result() -> Result:
    return cornerwise.couple(hostile_tables_campaign())


@pytest.fixture(scope="module")
def tables(result: Result) -> tuple[ManuscriptTable, ...]:
    return manuscript_tables(result)


@pytest.fixture(scope="module")
def files(result: Result) -> dict[str, str | bytes]:
    return table_files(result)


def _printed(table: ManuscriptTable) -> list[list[str]]:
    return [[cell.text for cell in row] for _, row in table.rows()]


def test_names_of_the_files(files: dict) -> None:
    stems = ("tables/couplings", "tables/constructs")
    wanted = [f"{stem}.{ending}" for stem in stems for ending in ("docx", "tex", "md", "html")]
    assert list(files) == [*wanted, "tables/tables.xlsx"]


@pytest.mark.parametrize("options", [TableOptions(), WIDE])
def test_same_bytes_whatever_the_clock_says(
    result: Result, options: TableOptions, monkeypatch: pytest.MonkeyPatch
) -> None:
    first = table_files(result, options)
    later = time.time() + 86_400 * 400
    monkeypatch.setattr(time, "time", lambda: later)
    real = time.localtime
    monkeypatch.setattr(time, "localtime", lambda *_: real(later))
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1234567890")
    time.sleep(2.1)  # a zip entry's clock ticks every two seconds
    assert table_files(result, options) == first


@pytest.mark.parametrize("name", ["tables/couplings.docx", "tables/tables.xlsx"])
def test_no_date_is_in_a_container(files: dict, name: str) -> None:
    with zipfile.ZipFile(io.BytesIO(files[name])) as container:
        assert {entry.date_time for entry in container.infolist()} == {(1980, 1, 1, 0, 0, 0)}
        assert b"dcterms" not in re.sub(rb"xmlns:\w+=\S+", b"", container.read("docProps/core.xml"))
        assert container.testzip() is None


def test_what_no_format_can_hold_becomes_a_space(result: Result) -> None:
    settings = replace(result.settings, title="one\x0btwo\ud800\nthree")
    files = table_files(replace(result, settings=settings), TableOptions(columns=["cycle"]))
    assert "one two  three." in _word(files, "couplings").paragraphs[0].text
    assert "one two  three." in files["tables/couplings.md"]


# Word


def _word(files: dict, stem: str) -> Document:
    return Document(io.BytesIO(files[f"tables/{stem}.docx"]))


@pytest.mark.parametrize("place", [0, 1])
def test_word_has_the_fields(files: dict, tables: tuple, place: int) -> None:
    table = tables[place]
    document = _word(files, table.name)
    (found,) = document.tables
    rows = [[cell.text.replace("\u00a0", " ") for cell in row.cells] for row in found.rows]
    heads = ["\n".join(filter(None, (plain(c.head), c.unit and f"({plain(c.unit)})"))) for c in table.columns]
    assert rows == [heads, *_printed(table)]
    paragraphs = [paragraph.text for paragraph in document.paragraphs]
    assert paragraphs[0] == f"Table {table.number}. {plain(table.title)}"
    assert [text.replace("\u00a0", " ") for text in paragraphs[1:] if text] == [
        plain(text).replace("\u00a0", " ") for text in table.paragraphs()
    ]


def test_word_repeats_the_head_and_keeps_rows_whole(files: dict) -> None:
    document = _word(files, "couplings")
    (found,) = document.tables
    assert found.style.name == "Manuscript table"
    assert [row._tr.xpath("./w:trPr/w:tblHeader") != [] for row in found.rows] == [True, *[False] * 4]
    assert all(row._tr.xpath("./w:trPr/w:cantSplit") for row in found.rows)
    styles = {
        paragraph.style.name for row in found.rows for cell in row.cells for paragraph in cell.paragraphs
    }
    assert styles == {"Table head", "Table number head", "Table text", "Table number"}


def test_word_turns_the_page_where_the_table_is_wide(result: Result) -> None:
    narrow = _word(table_files(result, TableOptions(columns=["cycle", "interaction"])), "couplings").sections[
        0
    ]
    wide = _word(table_files(result, WIDE), "couplings").sections[0]
    assert narrow.page_width < narrow.page_height
    assert wide.page_width > wide.page_height


def test_no_number_breaks_in_word(result: Result) -> None:
    document = _word(table_files(result, WIDE), "couplings")
    texts = [cell.text for row in document.tables[0].rows for cell in row.cells if "±" in cell.text]
    assert texts
    assert not any(" " in text for text in texts)


def test_a_group_is_one_field_across_in_word(result: Result) -> None:
    document = _word(table_files(result, WIDE), "couplings")
    heads = [row.cells[0].text for row in document.tables[0].rows if len({c._tc for c in row.cells}) == 1]
    assert heads == ["E5A", "R9Q", "K12A"]


def test_widths_fill_the_page(tables: tuple) -> None:
    for table in tables:
        found = layout(table)
        assert sum(found.stretched()) == pytest.approx(found.page_mm[0] - 40.0)
        assert sum(found.widths_mm) <= found.page_mm[0] - 40.0


def test_a_table_of_all_columns_has_a_page_as_wide_as_it_needs(result: Result) -> None:
    table = coupling_table(result, TableOptions(columns=[recipe.key for recipe in RECIPES]))
    found = layout(table)
    assert 297.0 < found.page_mm[0] <= 558.0
    for place, width in enumerate(found.widths_mm):
        texts = [row[place].text for _, row in table.rows()]
        if table.columns[place].numeric:
            assert max(width_of(text, found.size_pt) for text in texts) < width


# Workbook


def _sheets(files: dict) -> dict[str, Worksheet]:
    book = load_workbook(io.BytesIO(files["tables/tables.xlsx"]))
    return {sheet.title: sheet for sheet in book.worksheets}


def _by_head(sheet: Worksheet) -> list[dict]:
    heads, *rows = sheet.iter_rows()
    return [{head.value: cell for head, cell in zip(heads, row, strict=True)} for row in rows]


def test_numbers_come_back_at_full_precision(files: dict, result: Result) -> None:
    rows = {row.cycle: row for row in result.interactions}
    found = _by_head(_sheets(files)["couplings"])
    assert len(found) == len(rows)
    for line in found:
        row = rows[line["cycle"].value]
        for head, value in {
            "interaction (kcal/mol)": row.interaction, "std_uncertainty (kcal/mol)": row.std_uncertainty,
            "low (kcal/mol)": row.low, "high (kcal/mol)": row.high, "p_adjusted": row.p_adjusted,
        }.items():  # fmt: skip
            assert (line[head].value, line[head].data_type) == (value, "n")
        assert line["interaction (kcal/mol)"].number_format == line["high (kcal/mol)"].number_format
    assert any(line["interaction (kcal/mol)"].value < 0 for line in found)
    constructs = _by_head(_sheets(files)["constructs"])
    for line, row in zip(constructs, result.constructs, strict=True):
        assert line["median_mV (mV)"].value == row.median_mv < 0
        assert line["charge_ratio"].value == row.charge_ratio
        assert line["cells"].value == row.cells_used


def test_shown_decimals_are_those_of_the_printed_table(files: dict, tables: tuple) -> None:
    lines = _by_head(_sheets(files)["couplings"])
    for text, line in zip([row[1] for row in _printed(tables[0])], lines, strict=True):
        decimals = len(text.partition(" ")[0].partition(".")[2])
        assert line["interaction (kcal/mol)"].number_format == f"0.{'0' * decimals}"


def test_no_text_is_a_formula(files: dict) -> None:
    texts = [
        c for sheet in _sheets(files).values() for row in sheet.iter_rows() for c in row if c.data_type != "n"
    ]
    assert {cell.data_type for cell in texts} == {"s"}
    dangerous = [cell for cell in texts if str(cell.value)[0] in "=+-@"]
    assert {"=1+1", "@SUM(A1)", "-7"} <= {cell.value for cell in dangerous}
    assert all(cell.quotePrefix for cell in dangerous)
    assert not any(cell.quotePrefix for cell in texts if cell not in dangerous)


def test_every_column_of_every_sheet_is_explained(files: dict) -> None:
    sheets = _sheets(files)
    told = [[cell.value for cell in row] for row in sheets["columns"].iter_rows(min_row=2)]
    heads = [(name, cell.value) for name in ("couplings", "constructs") for cell in sheets[name][1]]
    assert [(sheet, column) for sheet, column, *_ in told] == heads
    assert all(meaning for _, _, _, meaning, _ in told)
    assert {cell.value for cell in sheets["notes"]["A"][1:]} == {"couplings", "constructs"}


def test_groups_are_a_column_of_their_own(result: Result) -> None:
    lines = _by_head(_sheets(table_files(result, WIDE))["couplings"])
    assert [line["group"].value for line in lines] == ["E5A"] * 3 + ["R9Q"] * 3 + ["K12A"] * 3


# HTML


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.elements: list[str] = []
        self.attributes: list[str] = []
        self.texts: list[str] = []

    def handle_starttag(self, tag: str, attrs: list) -> None:
        self.elements.append(tag)
        self.attributes += [name for name, _ in attrs]

    def handle_data(self, data: str) -> None:
        self.texts.append(data)


@pytest.mark.parametrize("place", [0, 1])
def test_labels_are_only_text_in_html(files: dict, tables: tuple, place: int) -> None:
    page, reader = files[f"tables/{tables[place].name}.html"], _Reader()
    reader.feed(page)
    assert not {"script", "img", "a", "link"} & set(reader.elements)
    assert not {"style", "onerror", "src", "href"} & set(reader.attributes)
    wanted = [text for row in _printed(tables[place]) for text in row]
    found = iter(reader.texts)
    assert all(text in found for text in wanted)  # in this order
    assert "default-src 'none'" in unescape(page)


# Markdown


def _fields(line: str) -> list[str]:
    return [field.strip() for field in re.split(r"(?<!\\)\|", line)[1:-1]]


def test_markdown_fields_come_back(files: dict, tables: tuple) -> None:
    for table in tables:
        lines = [line for line in files[f"tables/{table.name}.md"].splitlines() if line.startswith("|")]
        rows = [_fields(line) for line in lines[2:]]
        assert rows == [[markdown.escaped(text) for text in row] for row in _printed(table)]
        assert len({len(line) for line in lines}) == 1
        assert "<script>" not in files[f"tables/{table.name}.md"]


@pytest.mark.parametrize("text", [*LABELS.values(), *CYCLES.values(), "a_b_c", "[x](y)", "#12", "-- --"])
def test_markdown_shows_a_label_as_it_is(text: str) -> None:
    """Backslashes before punctuation and entities taken back, as CommonMark has it."""
    shown = unescape(re.sub(r"\\([!-/:-@\[-`{-~])", r"\1", markdown.escaped(text)))
    assert shown == text
    assert not re.search(r"(?<!\\)[*_`|<>~^$\[\]]", markdown.escaped(text))


def test_latex_label_is_in_the_tables(files: dict) -> None:
    escaped = r"A\_B\%\$\#\&\{\}\textasciitilde{}\textasciicircum{}\textbackslash{}"
    assert LATEX in LABELS.values()
    assert escaped in files["tables/constructs.tex"]
    assert "<" not in re.sub(r"%.*", "", files["tables/constructs.tex"]).split(r"\begin{longtable}")[1]
