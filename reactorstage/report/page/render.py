"""The page itself: sections, charts, style and script in one file without any address of another."""

from __future__ import annotations

import base64
import hashlib
import json
from collections.abc import Sequence
from functools import cache
from importlib.resources import files
from typing import Any

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from reactorstage.optimiser.result import INSIDE
from reactorstage.report.display import counted, in_units, unit
from reactorstage.report.page.along import Along, along, kept
from reactorstage.report.page.chart import Chart, pixels, svg
from reactorstage.report.page.parts import Block, Charts, Folded, Section
from reactorstage.report.page.sections import SECTIONS
from reactorstage.report.page.subject import Subject
from reactorstage.report.table_html import table_html
from reactorstage.report.unit_sets import TRADE

PACKAGE = "reactorstage.report.page"


def page_html(subject: Subject, units: str = TRADE) -> bytes:
    """The report as UTF-8 HTML with everything inside, byte-equal for equal input.

    Raises CallError for an unknown set of units.
    """
    with in_units(units):
        sections = [made for made in (section(subject) for section in SECTIONS) if made is not None]
        what = along(subject)
        text = _environment().get_template("page.html.j2").render(
            name=subject.now.case.name,
            status=subject.status,
            good=subject.status == INSIDE,
            about=about(subject),
            sections=sections,
            beds=[] if what is None else [bed.owner for bed in what.beds],
            with_today=what is not None and bool(what.before),
            numbers=numbers_json(what, charts_of(sections)),
            style=_asset("page.css"),
            script=_asset("page.js"),
            style_hash=_hash("page.css"),
            script_hash=_hash("page.js"),
        )  # fmt: skip
    return text.encode()


def about(subject: Subject) -> list[str]:
    """What kind of result this is, in a few words each."""
    case = subject.now.case
    kind = "best setting found" if subject.search is not None else "rating of the case as set"
    beds = sum(section.kind == "bed" for section in case.train)
    return [
        kind,
        counted(beds, "bed"),
        f"{len(case.species)} species",
        counted(len(case.reactions), "reaction"),
        f"aim: {case.aim.direction} {case.aim.quantity}",
    ]


@cache
def _environment() -> Environment:
    environment = Environment(
        loader=PackageLoader(PACKAGE, "."),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.globals["chart"] = svg
    environment.globals["table"] = lambda block: Markup(table_html(block.table, block.caption))
    return environment


@cache
def _asset(name: str) -> Markup:
    """Text of a file of this package that stands in the page as it is."""
    return Markup(files(PACKAGE).joinpath(name).read_text(encoding="utf-8"))


def _hash(name: str) -> str:
    """What the page's own policy names the style or script by."""
    digest = hashlib.sha256(_asset(name).encode()).digest()
    return f"sha256-{base64.b64encode(digest).decode()}"


def charts_of(sections: Sequence[Section]) -> list[Chart]:
    """Charts that the read-out speaks of."""
    blocks = [block for section in sections for block in _flat(section.blocks)]
    return [
        chart for block in blocks if isinstance(block, Charts) for chart in block.charts if chart.readings
    ]


def _flat(blocks: Sequence[Block]) -> list[Block]:
    return [
        inner for block in blocks for inner in (_flat(block.blocks) if isinstance(block, Folded) else [block])
    ]


def numbers_json(what: Along | None, charts: Sequence[Chart]) -> Markup:
    """Numbers for the read-out as JSON that may stand in a script element."""
    beds = [] if what is None else [
        {"name": bed.owner, "at": [f"{x:.4g}" for x in bed.catalyst[kept(bed)]],
         "depth": [f"{x:.0f}" for x in bed.depth[kept(bed)]]}
        for bed in what.beds
    ]  # fmt: skip
    content = {"unit": unit("mass"), "beds": beds, "charts": [_chart_numbers(chart) for chart in charts]}
    text = json.dumps(content, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    return Markup(text.replace("&", "\\u0026").replace("<", "\\u003c").replace(">", "\\u003e"))


def _chart_numbers(chart: Chart) -> dict[str, Any]:
    series = []
    for reading in chart.readings:
        x, y = pixels(chart, reading)
        series.append(
            {
                "name": reading.name,
                "unit": reading.unit,
                "now": reading.now,
                "today": reading.today,
                "x": x,
                "y": y,
            }
        )
    return {"key": chart.key, "upright": chart.upright, "series": series}
