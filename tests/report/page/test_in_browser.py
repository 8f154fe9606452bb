"""The page in a browser: it opens without complaint or request, read-out and switches work, it prints."""

from __future__ import annotations

import base64
import re

from tests.report.page.browser import Browser
from tests.report.page.conftest import Made

CHART = '[data-chart="temperature"] svg'
SAID = '[data-said="temperature"]'
ALL_HIDDEN = "[...document.querySelectorAll('[{}]')].every(e => getComputedStyle(e).display === 'none')"
HIDDEN = ALL_HIDDEN.format('data-bed="bed 2"')
ARROW_RIGHT, END, HOME, PAGE_DOWN, SPACE = 39, 35, 36, 34, 32


def text(browser: Browser, selector: str) -> str:
    found = browser.js(f"document.querySelector({selector!r}).textContent")
    assert isinstance(found, str)
    return found


def degrees(said: str) -> float:
    match = re.match(r"(-?[\d.]+) degC", said)
    assert match, said
    return float(match[1])


def test_it_opens_without_a_complaint_and_asks_for_nothing(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    assert browser.complaints == []
    assert browser.requests == [page.file.as_uri()]
    assert browser.js("document.title") == page.subject.now.case.name
    assert browser.js("document.getElementById('controls').hidden") is False


def test_pointing_reads_every_chart_at_one_place(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    browser.point(CHART, 0.28, 0.5)
    assert text(browser, "#where").startswith("bed 2, ")
    bed = page.subject.now.profiles[1]
    assert bed.T[0] - 273.2 <= degrees(text(browser, SAID)) <= bed.T[-1] - 273.1
    assert "today" in text(browser, SAID)
    assert "kmol/(t h)" in text(browser, '[data-said="rates"]')
    assert text(browser, '[data-said="conversion"]').endswith("%")
    assert browser.complaints == []


def test_the_keyboard_walks_along_the_train(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    browser.js("document.getElementById('place').focus()")
    browser.press("End", END)
    exit_ = page.subject.now.number("bed 4.exit temperature")
    assert exit_ is not None and abs(degrees(text(browser, SAID)) - (exit_ - 273.15)) < 0.051
    assert "bed 4, 100 % of its depth" in text(browser, "#where")
    browser.press("Home", HOME)
    before = text(browser, "#where")
    browser.press("ArrowRight", ARROW_RIGHT)
    assert text(browser, "#where") != before
    assert text(browser, SAID) in browser.js(
        "document.getElementById('place').getAttribute('aria-valuetext')"
    )
    browser.press("PageDown", PAGE_DOWN)
    assert text(browser, "#where").startswith("bed 2, 0 % of its depth")


def test_a_chart_takes_the_keyboard_too(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    browser.js("document.querySelector('[data-chart=\"pressure\"]').focus()")
    browser.press("End", END)
    assert text(browser, "#where").startswith("bed 4, 100 %")


def test_beds_and_today_can_be_switched_off_and_on(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    assert not browser.js(HIDDEN)
    browser.click('[data-switch="bed 2"]')
    assert browser.js(HIDDEN)
    browser.point(CHART, 0.28, 0.5)
    assert not text(browser, "#where").startswith("bed 2")
    browser.js("document.querySelector('[data-switch=\"bed 2\"]').focus()")
    browser.press(" ", SPACE)
    assert not browser.js(HIDDEN)
    browser.click("#today")
    assert "today" not in text(browser, SAID)
    assert browser.js(ALL_HIDDEN.format("data-setting=today"))
    assert browser.complaints == []


def test_with_every_bed_off_the_readout_says_so(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    for number in (1, 2, 3, 4):
        browser.click(f'[data-switch="bed {number}"]')
    assert text(browser, "#where") == "no bed is shown" and text(browser, SAID) == ""
    browser.click('[data-switch="bed 3"]')
    assert text(browser, "#where").startswith("bed 3")
    assert browser.complaints == []


def test_a_phone_scrolls_the_page_downwards_only(browser: Browser, page: Made) -> None:
    browser.open(page.file, 390, 800)
    assert browser.js("document.documentElement.scrollWidth") <= 390
    size = "parseFloat(getComputedStyle(document.querySelector('svg text.small')).fontSize)"
    scale = "document.querySelector('figure > svg').getBoundingClientRect().width / 460"
    assert browser.js(f"{size} * {scale}") >= 8.0
    assert browser.complaints == []


def test_it_prints_on_a4_without_its_controls(browser: Browser, page: Made) -> None:
    browser.open(page.file)
    printed = base64.b64decode(
        browser.ask("Page.printToPDF", preferCSSPageSize=True, printBackground=True)["data"]
    )
    boxes = {tuple(map(float, box.split())) for box in re.findall(rb"/MediaBox \[([\d. ]+)\]", printed)}
    assert boxes and all(abs(box[2] - 595) < 1.5 and abs(box[3] - 842) < 1.5 for box in boxes)
    assert 4 <= len(re.findall(rb"/Type /Page\b", printed)) <= 14
    browser.ask("Emulation.setEmulatedMedia", media="print")
    for selector in ("nav", ".controls", ".skip"):
        assert browser.js(f"getComputedStyle(document.querySelector({selector!r})).display") == "none"
    assert browser.js("getComputedStyle(document.querySelector('.sign')).display") == "block"
    browser.ask("Emulation.setEmulatedMedia", media="")


def test_markup_in_a_case_shows_as_text(browser: Browser, hostile: Made) -> None:
    browser.open(hostile.file)
    assert browser.js("window.hacked") is None
    assert browser.js("document.querySelectorAll('img, b').length") == 0
    assert browser.js("document.querySelectorAll('script').length") == 2
    assert browser.js("document.querySelector('h1').textContent") == hostile.subject.now.case.name
    assert browser.complaints == [] and browser.requests == [hostile.file.as_uri()]
