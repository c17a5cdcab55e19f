"""The report as text: what it says, in which order, and that nothing in it can act or call out."""

import html
import re
from dataclasses import replace
from html.parser import HTMLParser
from pathlib import Path

import pytest
from builders import campaign, construct
from report_example import HOSTILE, MEDIANS, NAMED, hostile_campaign

from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.render.explanation import explain
from cornerwise.render.methods import methods_paragraphs
from cornerwise.render.report.next_recordings import next_views
from cornerwise.render.report.page import RESEARCH_ONLY, report_html
from cornerwise.render.report.views import CycleViews
from cornerwise.render.rounding import span, typeset, with_uncertainty
from cornerwise.result import NextStepRow, Result
from cornerwise.tables import Table


@pytest.fixture(scope="module")
def result() -> Result:
    return couple(hostile_campaign())


@pytest.fixture(scope="module")
def page(result: Result) -> str:
    return report_html(result)


class _Reader(HTMLParser):
    """Collects elements and readable text, and insists that every element is closed."""

    VOID = frozenset({"meta", "input", "img", "link", "br"})

    def __init__(self) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.open: list[str] = []
        self.text: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] not in ("script", "style"):
            self.text.append(data)


def _read(page: str) -> _Reader:
    reader = _Reader()
    reader.feed(page)
    assert reader.open == []
    return reader


def test_the_same_result_gives_the_same_page(result: Result, page: str) -> None:
    assert report_html(couple(hostile_campaign())) == page


def test_names_are_only_text(page: str) -> None:
    reader = _read(page)
    assert [tag for tag, _ in reader.elements].count("script") == 1
    assert not {"img", "iframe", "object", "link"} & {tag for tag, _ in reader.elements}
    text = "".join(reader.text)
    assert text.count(HOSTILE) >= 5
    assert NAMED in text
    assert not any(name.startswith("on") for _, attrs in reader.elements for name in attrs)


def test_nothing_is_fetched_and_only_this_script_may_run(page: str) -> None:
    reader = _read(page)
    assert not any(
        "src" in attrs or attrs.get("href", "#").startswith("http") for _, attrs in reader.elements
    )
    assert "url(" not in page
    assert "@import" not in page
    (policy,) = [a["content"] for _, a in reader.elements if a.get("http-equiv") == "Content-Security-Policy"]
    assert policy is not None
    assert policy.startswith("default-src 'none';")
    assert "unsafe" not in policy


def test_the_answer_comes_first_with_the_caution(result: Result, page: str) -> None:
    text = html.unescape(re.sub(r"<[^>]*>", " ", page.split("</head>")[1]))
    order = [
        text.index(words)
        for words in ("The answer", "All cycles", "Cycle by cycle", "Every cell", "Input files")
    ]
    assert order == sorted(order)
    assert text.index(RESEARCH_ONLY[:40]) < order[0]
    coupled = sum(row.interaction_verdict == "coupled" for row in result.interactions)
    assert f"{coupled} of {len(result.interactions)} cycles" in text


def test_the_caution_is_that_of_the_readme() -> None:
    readme = (Path(__file__).parents[3] / "README.md").read_text(encoding="utf-8")
    assert RESEARCH_ONLY in " ".join(readme.split())


def test_every_number_is_that_of_the_result(result: Result, page: str) -> None:
    text = "".join(_read(page).text)
    for row in result.interactions:
        assert typeset(with_uncertainty(row.interaction, row.std_uncertainty)) in text
        assert typeset(span((row.low, row.high), row.std_uncertainty)) in text
        for paragraph in explain(result, row.cycle).split("\n\n"):
            assert typeset(paragraph) in text
    for construct_row in result.constructs:
        assert typeset(with_uncertainty(construct_row.energy, construct_row.std_uncertainty)) in text
    for flag in result.flags:
        if flag.cell is None:
            assert typeset(flag.message) in text


def test_what_to_record_next_is_told_for_every_unresolved_cycle(result: Result, page: str) -> None:
    section = "".join(
        _read(page[page.index('<section id="next"') : page.index('<section id="figures"')]).text
    )
    assert "What to record next" in section
    assert result.next_steps
    for step in result.next_steps:
        assert step.cycle in section
        told = step.remedy if step.limit else f"{step.next_construct}, {step.next_kind}"
        assert str(told) in section
    settled = couple(
        campaign(
            [construct(k, [m - 0.1, m, m + 0.1], [13.0, 13.01, 12.99]) for k, m in SETTLED.items()],
        )
    )
    assert not settled.next_steps
    assert "Every interaction that has an uncertainty is settled." in report_html(settled)


def test_the_level_of_a_half_width_that_is_adjusted_stands_beside_it(result: Result) -> None:
    usual = replace(result.next_steps[0], half_width=2.0, confidence=result.settings.confidence)
    adjusted = replace(usual, half_width=2.95, confidence=1 - 0.05 / 7)
    cycles = CycleViews(result, with_figures=False).all()
    steps = replace(result, next_steps=Table(NextStepRow, [usual, adjusted]))
    assert [view.now for view in next_views(steps, cycles)] == ["2.00", "2.95 (at 99.3 %)"]


SETTLED = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}


def test_every_cell_is_listed_with_its_curve(result: Result, page: str) -> None:
    section = page[page.index('id="cells"') : page.index('id="methods"')]
    assert section.count("<tr") - 1 == len(result.cells) == 4 * len(MEDIANS)
    assert section.count("<svg") == len(result.cells)


def test_methods_settings_versions_and_checksums_are_there(result: Result, page: str) -> None:
    text = "".join(_read(page).text)
    for paragraph in methods_paragraphs(result)[0]:
        assert typeset(paragraph) in text
    for name, number in result.versions.items():
        assert f"{name}{number}" in text
    assert "charge_margin" in text


def test_cycle_figures_can_be_left_out_and_are_when_there_are_many(result: Result, page: str) -> None:
    without = report_html(result, cycle_figures=False)
    assert len(without) < 0.6 * len(page)
    assert "are not in this file" in without
    assert "Charge-voltage curves of the corners" in page
    assert "Charge-voltage curves of the corners" not in without


def test_summaries_alone_make_a_report() -> None:
    constructs = [construct(k, (m, 1.0, 5), summarised=True) for k, m in list(MEDIANS.items())[:3]]
    constructs.append(construct("E5A/R9Q", (-20.0, 1.0, 5), summarised=True))
    page = report_html(couple(campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.2))))
    text = "".join(_read(page).text)
    assert "Only summaries were brought" in text
    assert "13.00 ± 0.20 e0 per channel" in text


def test_a_campaign_without_a_complete_cycle_says_so() -> None:
    page = report_html(couple(campaign([construct("WT", [-40.0, -41.0, -39.0], CHARGES3)])))
    assert "No cycle is complete" in "".join(_read(page).text)


CHARGES3 = [13.0, 12.5, 13.3]


@pytest.mark.parametrize(
    ("plain", "read"),
    [
        ("-0.5 to 1.2", "−0.5 to 1.2"),
        ("(-1)^n", "(−1)^n"),
        ("Δ6-46", "Δ6-46"),
        ("2.0 - 3.0", "2.0 − 3.0"),
        ("p = 5.3e-15", "p = 5.3e-15"),
        ("x-3", "x-3"),
    ],
)
def test_minus_signs_are_set_before_numbers_and_between_terms(plain: str, read: str) -> None:
    assert typeset(plain) == read


@pytest.mark.parametrize(
    ("double", "verdict", "said"),
    [
        (-20.0, "coupled", "The only pair, E5A/R9Q, is coupled by more than 1 kcal/mol."),
        (-42.0, "detected", "The only pair, E5A/R9Q, interacts, but is not shown to be coupled by more than"),
        (-45.0, "uncoupled", "The only pair, E5A/R9Q, is shown not to be coupled by more than 1 kcal/mol."),
    ],
)
def test_the_headline_of_a_single_pair(double: float, verdict: str, said: str) -> None:
    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": double}
    made = [construct(label, [m - 1, m, m + 0.7, m + 1.4]) for label, m in medians.items()]
    found = couple(campaign(made, charge=StatedCharge(value_e0=10.0, sem_e0=0.1)))
    assert found.interactions[0].interaction_verdict == verdict
    assert typeset(said) in html.unescape(report_html(found))


@pytest.mark.parametrize("charge", ["measured", "wild-type"])
def test_measured_charges_that_enter_no_energy_are_told(charge: str) -> None:
    made = [construct(label, [m - 1, m, m + 0.7], [13.0, 12.6, 13.2]) for label, m in MEDIANS.items()]
    page = html.unescape(report_html(couple(campaign(made, charge=charge))))
    told = "The charges that were measured of 7 mutants enter no energy"
    assert (told in page) == (charge == "wild-type")
