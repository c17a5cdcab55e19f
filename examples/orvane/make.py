"""Write the report of the shipped campaign and the pictures that README.md shows.

Run from the top folder: python examples/orvane/make.py
The picture of the report's first screen needs Debian's chromium and the package playwright; without them it
is left as it is. Orvane and its residues are invented.
"""

import shutil
from pathlib import Path

import cornerwise
from cornerwise.render.figures.files import CycleFigures, rendered
from cornerwise.render.figures.style import SINGLE_COLUMN_MM
from cornerwise.render.report.page import report_html
from cornerwise.result import Result

HERE = Path(__file__).parent
CYCLE = "D171N/K232Q"
BROWSER_OPTIONS = [
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
]  # fmt: skip


def main() -> None:
    """Compute the campaign and write what is shown of it."""
    result = cornerwise.couple(cornerwise.read(HERE.parents[1] / "cycles" / "orvane"))
    (HERE / "report.html").write_text(report_html(result), encoding="utf-8")
    write_square(result)
    if shutil.which("chromium") is None:
        print("no chromium: report.png is left as it is")
    else:
        take_picture()


def write_square(result: Result) -> None:
    """One cycle as a square, SVG and PNG."""
    row = next(row for row in result.interactions if row.cycle == CYCLE)
    sheet = CycleFigures(result).of(row, SINGLE_COLUMN_MM)["shape"]
    (HERE / "square.svg").write_bytes(rendered(sheet, "svg"))
    (HERE / "square.png").write_bytes(rendered(sheet, "png"))


def take_picture() -> None:
    """First screen of the report."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=shutil.which("chromium"), args=BROWSER_OPTIONS)
        page = browser.new_page(viewport={"width": 1280, "height": 1000})
        page.goto((HERE / "report.html").as_uri())
        page.screenshot(path=HERE / "report.png")
        browser.close()


if __name__ == "__main__":
    main()
