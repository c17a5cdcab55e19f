"""Methods and legends: this campaign's numbers, and only references that the text cites."""

import re

import pytest
from builders import campaign, construct
from report_example import hostile_campaign

from cornerwise.campaign import StatedCharge
from cornerwise.coupling import couple
from cornerwise.render.figures.files import CycleFigures, overview_sheets
from cornerwise.render.methods import figure_legends, methods_paragraphs, methods_text
from cornerwise.result import Result

MEDIANS = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}


def _couple(charges: list[float] | None = None, **settings: object) -> Result:
    constructs = [construct(k, [m - 1, m, m + 0.7, m + 1.5], charges) for k, m in MEDIANS.items()]
    return couple(campaign(constructs, **settings))


@pytest.fixture(scope="module")
def result() -> Result:
    return couple(hostile_campaign())


def test_numbers_of_the_campaign_are_in_the_text(result: Result) -> None:
    text = methods_text(result)
    assert "curves of 8 constructs with 4 cells each (32 cells in all)" in text
    assert "2000 replicates, seed 1" in text
    assert "measured on 7 constructs; that of E5A/K12A was not measured" in text
    assert f"verdicts on {len(result.interactions)} cycles" in text
    for verdict in {row.interaction_verdict for row in result.interactions}:
        number = sum(row.interaction_verdict == verdict for row in result.interactions)
        assert f"{number} {verdict}" in text


def test_every_reference_is_cited_and_every_citation_has_one(result: Result) -> None:
    paragraphs, references = methods_paragraphs(result)
    groups = re.findall(r"\[([\d, ]+)\]", " ".join(paragraphs))
    in_order = dict.fromkeys(int(number) for group in groups for number in group.split(","))
    assert list(in_order) == list(range(1, len(references) + 1))


def test_settings_change_the_sentences() -> None:
    shared = methods_text(_couple(charge=StatedCharge(value_e0=13.6, sem_e0=0.3, citation="a handbook")))
    assert "13.60 ± 0.30 e0 per channel (value and standard uncertainty; a handbook)" in shared
    plain = methods_text(_couple([13.0, 12.5, 13.3, 12.9]))
    assert "voltage offset" not in plain
    changed = methods_text(
        _couple(
            [13.0, 12.5, 13.3, 12.9], voltage_offset_mv=1.5, confidence=0.9, charge_margin=0.05,
            reference_voltage_mv=-60.0, energy_unit="kT", temperature_c=20.0,
        )
    )  # fmt: skip
    assert "standard uncertainty 1.5 mV" in changed
    assert "90 % intervals" in changed
    assert "the 80 % interval of their ratio lies inside 1 ± 0.05" in changed
    assert "F Q (Vm - V) at V = -60 mV" in changed
    assert "T is 20 degrees Celsius" in changed


def test_one_cycle_is_not_adjusted_and_triples_bring_their_reference(result: Result) -> None:
    assert "Holm" not in methods_text(_couple([13.0, 12.5, 13.3, 12.9]))
    assert "Holm" in methods_text(result)
    assert "Horovitz" in methods_text(result)
    assert "Horovitz" not in methods_text(_couple([13.0, 12.5, 13.3, 12.9]))


def test_false_discovery_is_named_when_it_is_used() -> None:
    text = methods_text(couple(hostile_campaign(adjustment="benjamini-hochberg")))
    assert "Benjamini" in text
    assert "Holm" not in text


def test_summaries_are_not_called_curves() -> None:
    constructs = [construct(k, (m, 1.0, 5), summarised=True) for k, m in MEDIANS.items()]
    text = methods_text(couple(campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.2))))
    assert "Median voltages of 4 constructs entered as mean" in text
    assert "Q-V" not in text


def test_every_kind_of_figure_has_a_legend_with_unit_and_sign(result: Result) -> None:
    legends = figure_legends(result)
    kinds = set(overview_sheets(result, 85.0))
    for row in result.interactions:
        kinds |= set(CycleFigures(result).of(row, 85.0))
    assert kinds <= set(legends)
    for kind in ("interactions", "matrix", "shape"):
        assert "kcal/mol per channel" in legends[kind]
        assert "favours the resting state" in legends[kind]
    assert "n = 4 cells a construct" in legends["interactions"]
