"""The demo board's page, made once, in a browser that is started once."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from pairrules.pipeline import check
from pairrules.reports.review_page.page import render
from pairrules.shipped import demo_folder
from tests.reports.review_page.browser import Page, browser

PAIRS = "[CLU]*"
"""Enough of the demo board for every part of the page: LINK_CLOCK, USB, CAN and CONVERTER."""

SETTINGS = """
extends: []
reference_nets: [GND]
limits:
  leg-length: {most: 0.5 mm, severity: review, source: this test}
  loop-area: {most: 20 mm2, severity: note, source: this test}
  gap-band: {spread: 20 %, for: 5 mm, severity: note, source: this test}
classes:
  clock:
    match: [LINK_CLOCK]
    source: {kind: line-driver, resistance: 50 ohm, mismatch: 5 %}
    load: {kind: line-receiver, resistance: 100 kohm, across: 100 ohm}
    frequencies: [1 MHz, 100 MHz]
    limits:
      via-match: {most: 0, severity: review, source: this test}
      link-rejection: {least: 20 dB, severity: review, source: this test}
  usb:
    match: [USB]
"""
"""Limits of the tests' own, so that they do not follow those of the demo; LINK_CLOCK breaks two, USB and CAN one."""


@pytest.fixture(scope="session")
def downloads(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("saved")


@pytest.fixture(scope="session")
def driver(downloads: Path) -> Iterator[Any]:
    with browser(downloads) as found:
        yield found


@pytest.fixture(scope="session")
def project(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the demo board and settings, and no waivers."""
    folder = tmp_path_factory.mktemp("project")
    shutil.copy(demo_folder() / "tide-gauge-buoy.json", folder)
    (folder / "pairrules.yaml").write_text(SETTINGS, encoding="utf-8")
    return folder


@pytest.fixture(scope="session")
def demo_file(driver: Any, project: Path) -> Path:
    """The page. It asks for the browser first, so that nothing is worked out where there is none."""
    file = project / "review.html"
    file.write_text(render(check(project / "tide-gauge-buoy.json", pairs=PAIRS, drawing=True)), encoding="utf-8")
    return file


@pytest.fixture
def page(driver: Any, demo_file: Path) -> Page:
    found = Page(driver, demo_file)
    found.media()
    return found.open()
