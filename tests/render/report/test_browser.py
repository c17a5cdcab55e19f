"""The report in a browser: it sorts, filters and opens, by mouse and keyboard, and calls nobody."""

import re
from collections.abc import Iterator

import pytest
from browsing import launched, require_browser, violations, watched
from report_example import hostile_campaign

from cornerwise.coupling import couple
from cornerwise.render.report.page import report_html
from cornerwise.result import Result

require_browser("the report has")

from playwright.sync_api import Browser, Page, expect  # noqa: E402


@pytest.fixture(scope="module")
def result() -> Result:
    return couple(hostile_campaign())


@pytest.fixture(scope="module")
def address(result: Result, tmp_path_factory: pytest.TempPathFactory) -> str:
    path = tmp_path_factory.mktemp("report") / "report.html"
    path.write_text(report_html(result), encoding="utf-8")
    return path.as_uri()


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    with launched() as browser:
        yield browser


@pytest.fixture
def opened(browser: Browser, address: str, request: pytest.FixtureRequest) -> Iterator[Page]:
    """The report; the test fails if the page complains, calls out or asks the user anything."""
    options = {"viewport": {"width": 1280, "height": 900}, **getattr(request, "param", {})}
    with watched(browser, address, **options) as page:
        yield page


def _shown(page: Page) -> list[str]:
    return page.locator("#cycle-table tbody tr:visible th").all_inner_texts()


def test_it_starts_with_the_strongest(opened: Page, result: Result) -> None:
    ranked = sorted(result.interactions, key=lambda row: row.rank or 0)
    assert _shown(opened) == [row.cycle for row in ranked]


def test_sorting_by_a_number_goes_both_ways(opened: Page, result: Result) -> None:
    rising = [row.cycle for row in sorted(result.interactions, key=lambda row: row.interaction or 0.0)]
    header = opened.locator("#cycle-table th", has_text="I (kcal/mol)")
    header.get_by_role("button").click()
    assert _shown(opened) == rising
    assert header.get_attribute("aria-sort") == "ascending"
    header.get_by_role("button").press("Enter")
    assert _shown(opened) == rising[::-1]
    assert header.get_attribute("aria-sort") == "descending"


def test_sorting_another_column_forgets_the_first(opened: Page) -> None:
    opened.locator("#cycle-table").get_by_role("button", name="verdict").click()
    opened.locator("#cycle-table").get_by_role("button", name="cycle").click()
    assert opened.locator("#cycle-table th[aria-sort]").count() == 1
    assert _shown(opened)[1:] == sorted(_shown(opened)[1:])


def test_filters_narrow_the_table_and_the_cycles(opened: Page, result: Result) -> None:
    opened.get_by_label("Name holds").fill("e5a")
    wanted = {row.cycle for row in result.interactions if "E5A" in row.cycle}
    assert set(_shown(opened)) == wanted
    assert opened.locator("details.cycle:visible").count() == len(wanted)
    total = len(result.interactions)
    assert opened.locator("#filter-count").inner_text() == f"{len(wanted)} of {total} shown"
    opened.get_by_label("Verdict").select_option("unresolved")
    both = {row.cycle for row in result.interactions if row.interaction_verdict == "unresolved"} & wanted
    assert set(_shown(opened)) == both
    opened.get_by_role("button", name="Show all").click()
    assert len(_shown(opened)) == total


def test_shortcut_and_doubt_filters(opened: Page, result: Result) -> None:
    opened.get_by_label("Shortcut").select_option("invalid")
    assert set(_shown(opened)) == {r.cycle for r in result.interactions if r.shortcut_verdict == "invalid"}
    opened.get_by_role("button", name="Show all").click()
    opened.get_by_label("without flags").check()
    assert set(_shown(opened)) == {row.cycle for row in result.interactions if not row.flags}


def test_a_link_opens_its_cycle_even_a_filtered_one(opened: Page) -> None:
    assert opened.locator("details.cycle[open]").count() == 0
    opened.locator("#cycle-table tbody a").first.click()
    cycle = opened.locator("details.cycle").first
    expect(cycle).to_have_attribute("open", "")  # once the browser has told the page of the new address
    assert cycle.locator("figure svg").count() >= 3
    assert cycle.locator("figure svg").first.is_visible()
    opened.get_by_label("Name holds").fill("no such cycle")
    assert _shown(opened) == []
    opened.locator("#answer a[href='#cycle-2']").first.click()
    expect(opened.locator("#cycle-2")).to_have_attribute("open", "")


def test_a_cycle_opens_by_keyboard(opened: Page) -> None:
    summary = opened.locator("details.cycle summary").first
    summary.focus()
    opened.keyboard.press("Enter")
    expect(opened.locator("details.cycle").first).to_have_attribute("open", "")


def test_open_all_and_close_all(opened: Page, result: Result) -> None:
    opened.get_by_role("button", name="Open all").click()
    assert opened.locator("details.cycle[open]").count() == len(result.interactions)
    opened.get_by_role("button", name="Close all").click()
    assert opened.locator("details.cycle[open]").count() == 0


def test_names_stay_text(opened: Page) -> None:
    assert opened.title().startswith("<script>")
    assert opened.locator("img").count() == 0


@pytest.mark.parametrize(
    "opened",
    [{"viewport": {"width": w, "height": 800}} for w in (320, 390, 800, 1280, 1920)],
    indirect=True,
    ids=lambda option: str(option["viewport"]["width"]),
)
def test_nothing_makes_the_page_scroll_sideways(opened: Page) -> None:
    opened.get_by_role("button", name="Open all").click()
    assert opened.evaluate("document.documentElement.scrollWidth <= window.innerWidth")


@pytest.mark.parametrize(
    "opened",
    [
        {"viewport": {"width": 390, "height": 800}, "color_scheme": "light", "bypass_csp": True},
        {"viewport": {"width": 1280, "height": 800}, "color_scheme": "light", "bypass_csp": True},
        {"viewport": {"width": 1280, "height": 800}, "color_scheme": "dark", "bypass_csp": True},
    ],
    indirect=True,
    ids=["phone", "light", "dark"],
)
def test_accessibility(opened: Page) -> None:
    opened.get_by_role("button", name="Open all").click()
    assert violations(opened) == {}


@pytest.mark.parametrize("opened", [{"java_script_enabled": False}], indirect=True)
def test_without_scripts_everything_is_there_to_read(opened: Page, result: Result) -> None:
    assert opened.locator("#cycle-table tbody tr").count() == len(result.interactions)
    assert not opened.locator("#filters").is_visible()
    assert opened.locator("th button").count() == 0
    opened.locator("details.cycle summary").first.click()
    assert opened.locator("details.cycle figure svg").first.is_visible()


def test_print_opens_every_cycle_and_closes_it_again(opened: Page, result: Result) -> None:
    pdf = opened.pdf(prefer_css_page_size=True)
    pages = len(re.findall(rb"/Type\s*/Page\b", pdf))
    assert pages > len(result.interactions)
    opened.emulate_media(media="print")
    opened.evaluate("window.dispatchEvent(new Event('beforeprint'))")
    assert opened.locator("details.cycle[open]").count() == len(result.interactions)
    assert not opened.locator("nav").is_visible()
    assert not opened.locator("#filters").is_visible()
    opened.evaluate("window.dispatchEvent(new Event('afterprint'))")
    assert opened.locator("details.cycle[open]").count() == 0


def test_rings_lie_around_their_points(opened: Page) -> None:
    """The ring is one arc that almost closes: a wrong turn would set it beside its point."""
    box = opened.evaluate(
        """(ring) => {
            const svg = document.createElementNS("http://www.w3.org/2000/svg", "svg");
            const path = document.createElementNS("http://www.w3.org/2000/svg", "path");
            path.setAttribute("d", ring);
            svg.append(path);
            document.body.append(svg);
            const {x, y, width, height} = path.getBBox();
            svg.remove();
            return [x, y, width, height];
        }""",
        _ring_path(),
    )
    assert box == pytest.approx([9.0, 19.0, 2.0, 2.0], abs=0.02)


def _ring_path() -> str:
    from cornerwise.render.figures.marks import Sheet
    from cornerwise.render.figures.vector import svg_inline

    sheet = Sheet(width=40.0, height=40.0, title="")
    sheet.symbols([(10.0, 20.0)], "ring", size=2.0)
    found = re.search(r'd="([^"]+)"', svg_inline(sheet))
    assert found is not None
    return found[1]
