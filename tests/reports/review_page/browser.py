"""A headless browser for the tests of the page, and what they ask of it."""

from __future__ import annotations

import json
import shutil
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pytest

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")


@contextmanager
def browser(downloads: Path) -> Iterator[Any]:
    """A browser that saves into `downloads` and keeps a log of every request; the test is skipped without one."""
    if CHROMIUM is None or DRIVER is None:
        pytest.skip("chromium and chromedriver are not installed (Debian: apt-get install chromium chromium-driver)")
    webdriver = pytest.importorskip("selenium.webdriver")
    options = webdriver.ChromeOptions()
    options.binary_location = CHROMIUM
    for switch in ("--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage"):
        options.add_argument(switch)
    options.add_experimental_option("prefs", {"download.default_directory": str(downloads)})
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(DRIVER))
    try:
        yield driver
    finally:
        driver.quit()


class Page:
    """The page in the browser."""

    def __init__(self, driver: Any, file: Path) -> None:
        self.driver, self.file = driver, file

    def open(self, width: int = 1280, height: int = 900, *, fresh: bool = True) -> Page:
        """Open it from disk, by default with nothing kept from before."""
        self.size(width, height)
        self.log("performance")
        self.log("browser")
        self.driver.get(self.file.as_uri())
        if fresh:
            self.run("localStorage.clear()")
            self.driver.get("about:blank")
            self.driver.get(self.file.as_uri())
        return self

    def size(self, width: int, height: int) -> None:
        self.driver.execute_cdp_cmd(
            "Emulation.setDeviceMetricsOverride",
            {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False},
        )

    def media(self, kind: str = "", scheme: str = "light") -> None:
        """`kind`: "print", or "" for the screen."""
        features = [{"name": "prefers-color-scheme", "value": scheme}]
        self.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": kind, "features": features})

    def run(self, script: str, *arguments: Any) -> Any:
        return self.driver.execute_script(script, *arguments)

    def find(self, selector: str) -> Any:
        return self.driver.find_element("css selector", selector)

    def all(self, selector: str) -> list[Any]:
        found: list[Any] = self.driver.find_elements("css selector", selector)
        return found

    def text(self, selector: str) -> str:
        return str(self.run("return document.querySelector(arguments[0]).textContent", selector))

    def click(self, selector: str) -> None:
        element = self.find(selector)
        self.run("arguments[0].scrollIntoView({block: 'center'})", element)
        element.click()

    def press(self, *keys: str) -> None:
        """Keys on whatever has the focus."""
        for key in keys:
            self.driver.switch_to.active_element.send_keys(key)

    def names(self) -> list[str]:
        """Names of the listed pairs, in their order."""
        return [
            str(name)
            for name in self.run(
                "return [...document.querySelectorAll('#list .item-name')].map((one) => one.firstChild.textContent)"
            )
        ]

    def log(self, kind: str) -> list[dict[str, Any]]:
        found: list[dict[str, Any]] = self.driver.get_log(kind)
        return found

    def requests(self) -> list[str]:
        """Addresses asked for since the log was last read."""
        messages = [json.loads(entry["message"])["message"] for entry in self.log("performance")]
        return [one["params"]["request"]["url"] for one in messages if one["method"] == "Network.requestWillBeSent"]

    def saved(self, name: str, folder: Path) -> str:
        """The text of a file the page has saved."""
        return wait_for(lambda: (folder / name).read_text(encoding="utf-8") if (folder / name).is_file() else "")


def wait_for(ask: Callable[[], str], patience_s: float = 20.0) -> str:
    """What `ask` answers once it answers anything."""
    end = time.monotonic() + patience_s
    while time.monotonic() < end:
        found = ask()
        if found:
            return found
        time.sleep(0.05)
    raise AssertionError("nothing came in time")
