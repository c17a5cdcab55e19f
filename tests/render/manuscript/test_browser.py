"""The tables as pages in a browser: any width, light and dark, labels only text, nobody called."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from browsing import launched, require_browser, violations, watched
from manuscript_example import hostile_tables_campaign

import cornerwise
from cornerwise.render.manuscript.document import ManuscriptTable
from cornerwise.render.manuscript.files import manuscript_tables
from cornerwise.render.manuscript.options import TableOptions
from cornerwise.render.manuscript.web import html_text

require_browser("the tables have")

from playwright.sync_api import Browser  # noqa: E402

LINES = """all => all.map((one) => {
    const range = document.createRange();
    range.selectNodeContents(one);
    return new Set([...range.getClientRects()].map((box) => box.top)).size;
})"""


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    with launched() as browser:
        yield browser


@pytest.fixture(scope="module")
def pages(tmp_path_factory: pytest.TempPathFactory) -> list[tuple[ManuscriptTable, Path]]:
    result = cornerwise.couple(hostile_tables_campaign())
    folder, found = tmp_path_factory.mktemp("tables"), []
    for group in ("none", "pair"):
        for table in manuscript_tables(result, TableOptions(group=group)):
            path = folder / f"{table.name}-{group}.html"
            path.write_text(html_text(table), encoding="utf-8")
            found.append((table, path))
    return found


@pytest.mark.parametrize("width", [320, 800, 1920])
def test_only_the_table_scrolls_sideways(browser: Browser, pages: list, width: int) -> None:
    for _, path in pages:
        with watched(browser, path.as_uri(), viewport={"width": width, "height": 800}) as page:
            assert page.evaluate("document.documentElement.scrollWidth <= window.innerWidth")
            assert set(page.locator("td.number").evaluate_all(LINES)) == {1}


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_accessibility(browser: Browser, pages: list, scheme: str) -> None:
    for _, path in pages:
        with watched(browser, path.as_uri(), color_scheme=scheme, bypass_csp=True) as page:
            assert violations(page) == {}


def test_fields_are_shown_as_they_are(browser: Browser, pages: list) -> None:
    for table, path in pages:
        with watched(browser, path.as_uri()) as page:
            shown = page.locator("td").all_inner_texts()
            assert shown == [cell.text for _, row in table.rows() for cell in row]
            assert page.locator("script, img, a").count() == 0
