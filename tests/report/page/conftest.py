"""Pages of the lead case, of a rating and of a case whose names hold markup; a browser where there is one."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

import reactorstage
from reactorstage.face import Optimisation
from reactorstage.report.page.render import page_html
from reactorstage.report.page.subject import Subject, of_optimum, of_rating
from tests.report.page.browser import Browser, browser_path

SCRIPT, IMAGE = "<script>window.hacked=1</script>", "<img src=x onerror=window.hacked=2>"


@dataclass(frozen=True)
class Made:
    """A page with what it was made of, and where it lies."""

    subject: Subject
    text: str
    file: Path


def kept(folder: Path, name: str, subject: Subject) -> Made:
    data = page_html(subject)
    file = folder / f"{name}.html"
    file.write_bytes(data)
    return Made(subject, data.decode(), file)


@pytest.fixture(scope="session")
def found(lead: Path) -> Optimisation:
    return reactorstage.optimise(reactorstage.load(lead), starts=6)


@pytest.fixture(scope="session")
def impossible(lead: Path) -> Optimisation:
    """The lead case with catalyst so tired that no setting meets every limit."""
    return reactorstage.optimise(reactorstage.load(lead, ["every bed.catalyst activity=0.55"]), starts=3)


@pytest.fixture(scope="session")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("pages")


@pytest.fixture(scope="session")
def page(found: Optimisation, folder: Path) -> Made:
    """The lead case, optimised."""
    return kept(folder, "lead", of_optimum(found))


@pytest.fixture(scope="session")
def hostile_case(lead: Path, folder: Path) -> Path:
    """The lead case with markup in its name, in labels, reasons, sources, level and reaction names."""
    text = lead.read_text(encoding="utf-8")
    for old, new in {
        "case: Selkemouth Works, four-bed ethylation": f"case: \"{SCRIPT} & 'quotes' </title>\"",
        "  hot exit:": f'  "hot {IMAGE}":',
        "why: unlit below": f"why: '{SCRIPT}</script>'",
        "  by-product:": f'  "by {IMAGE}":',
        "  second ethylation:": '  "second </script><b>":',
        "steam 28 bar:": f'"steam {IMAGE}":',
        "source: from memory, check before use": f"source: '{SCRIPT}'",
    }.items():
        assert old in text
        text = text.replace(old, new)
    path = folder / "hostile.yaml"
    path.write_text(text, encoding="utf-8")
    return path


@pytest.fixture(scope="session")
def hostile(hostile_case: Path, folder: Path) -> Made:
    """A rating of a case that holds markup everywhere."""
    programme = reactorstage.compile(reactorstage.load(hostile_case))
    return kept(folder, "hostile", of_rating(programme, programme.rate()))


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    path = browser_path()
    if path is None:
        pytest.skip("no Chromium is installed: the page is not opened, only read")
    running = Browser(path)
    yield running
    running.close()
