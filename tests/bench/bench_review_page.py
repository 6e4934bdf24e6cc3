"""Benchmark of the review page: its size, how long it takes to make, to open, and to show another pair.

    python -m tests.bench.bench_review_page --pairs 400

Opening is timed in headless Chromium, from the start of navigation to the end of the page's own script; choosing, until
the pair has been drawn and laid out. Nothing is asserted.
"""

from __future__ import annotations

import argparse
import tempfile
import time
from pathlib import Path
from typing import Any

from pairrules.pipeline import check
from pairrules.reports.review_page.page import render
from tests.bench.big_board import write_board
from tests.reports.review_page.browser import browser

_OPENED = "return performance.getEntriesByType('navigation')[0].loadEventEnd"
_CHOOSE = """
const begun = performance.now();
choices = document.querySelectorAll('#list button');
choices[Math.min(arguments[0], choices.length - 1)].click();
document.getElementById('detail').getBoundingClientRect();
return performance.now() - begun;
"""


def main() -> None:
    parser = argparse.ArgumentParser(description="time the review page")
    parser.add_argument("--pairs", type=int, default=400)
    parser.add_argument("--jobs", type=int, default=1)
    parser.add_argument("--keep", type=Path, help="keep the page there")
    chosen = parser.parse_args()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        board, page = folder / "board.xml", chosen.keep or folder / "review.html"
        write_board(board, pairs=chosen.pairs)
        begun = time.perf_counter()
        result = check(board, drawing=True, jobs=chosen.jobs)
        checked = time.perf_counter()
        text = render(result)
        rendered = time.perf_counter()
        page.write_text(text, encoding="utf-8")
        findings = sum(len(pair.findings) for pair in result.pairs)
        print(f"{chosen.pairs} pairs, {result.summary['flag']} flagged, {findings} findings")
        print(f"check with drawings {checked - begun:.1f} s, page {rendered - checked:.1f} s, {len(text) / 1e6:.2f} MB")
        with browser(folder) as driver:
            _measure(driver, page.resolve())


def _measure(driver: Any, page: Path) -> None:
    opened, shown = [], []
    for i in range(5):
        driver.get("about:blank")
        driver.get(page.as_uri())
        opened.append(float(driver.execute_script(_OPENED)))
        shown.append(float(driver.execute_script(_CHOOSE, 7 * i + 3)))
    print(f"open {min(opened):.0f} to {max(opened):.0f} ms, show a pair {min(shown):.0f} to {max(shown):.0f} ms")


if __name__ == "__main__":
    main()
