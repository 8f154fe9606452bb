"""The page read without a browser: whole, self-contained, accessible, escaped, of one set of units."""

from __future__ import annotations

import base64
import hashlib
import json
import re
from dataclasses import replace
from html import escape
from html.parser import HTMLParser
from importlib.resources import files
from pathlib import Path

import pytest

import reactorstage
from reactorstage.case import units
from reactorstage.face import Optimisation
from reactorstage.report import cautions
from reactorstage.report.inputs import given
from reactorstage.report.page import render
from reactorstage.report.page.parts import Section, Words
from reactorstage.report.page.render import page_html
from reactorstage.report.page.sections import SECTIONS
from reactorstage.report.page.sections.summary import summary_facts
from reactorstage.report.page.subject import Reference, Subject, of_optimum, of_rating
from reactorstage.report.unit_sets import UNIT_SETS
from tests.report.page.conftest import IMAGE, SCRIPT, Made

VOID = {"meta", "input", "br", "link", "img"}
CLOSED = {"path", "rect", "circle"}
MOST_BYTES = 1_500_000


class Reader(HTMLParser):
    """Elements with their attributes and the texts in them; complains about tags that do not match."""

    def __init__(self, text: str):
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.texts: list[tuple[str, str]] = []
        self.feed(text)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {name: value or "" for name, value in attrs}))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert tag in CLOSED
        self.elements.append((tag, {name: value or "" for name, value in attrs}))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.texts.append((self.open[-1] if self.open else "", data))

    def all(self, tag: str) -> list[dict[str, str]]:
        return [attributes for name, attributes in self.elements if name == tag]

    @property
    def words(self) -> str:
        return " ".join(" ".join(text for tag, text in self.texts if tag not in ("script", "style")).split())


@pytest.fixture(scope="module")
def read(page: Made) -> Reader:
    return Reader(page.text)


def test_elements_close_in_order_and_ids_are_unique(read: Reader) -> None:
    ids = [attributes["id"] for _, attributes in read.elements if "id" in attributes]
    assert len(ids) == len(set(ids)) > 20


def test_links_and_labels_point_at_what_is_there(read: Reader) -> None:
    ids = {attributes["id"] for _, attributes in read.elements if "id" in attributes}
    links = [attributes["href"] for attributes in read.all("a")]
    assert links and all(link[0] == "#" and link[1:] in ids for link in links)
    named = [a[key] for _, a in read.elements for key in ("aria-labelledby", "for") if key in a]
    assert named and {word for text in named for word in text.split()} <= ids


def test_nothing_points_outside_the_file(page: Made, read: Reader) -> None:
    assert not re.findall(r"https?://|//[a-z]|@import|url\((?!#)", page.text.replace("://www.w3.org", ""))
    assert not [a for _, a in read.elements if {"src", "srcset", "action", "data"} & set(a)]
    assert not [a for _, a in read.elements if "style" in a or any(name.startswith("on") for name in a)]
    assert {tag for tag, _ in read.elements}.isdisjoint(
        {"link", "iframe", "object", "embed", "img", "form", "base"}
    )


def test_the_policy_lets_in_nothing_but_its_own_style_and_script(page: Made, read: Reader) -> None:
    policy = next(a["content"] for a in read.all("meta") if a.get("http-equiv") == "Content-Security-Policy")
    rules = dict(rule.strip().split(" ", 1) for rule in policy.split(";"))
    assert rules["default-src"] == rules["base-uri"] == rules["form-action"] == "'none'"
    style = re.search(r"<style>(.*?)</style>", page.text, re.DOTALL)
    script = re.findall(r"<script>(.*?)</script>", page.text, re.DOTALL)
    assert style is not None and len(script) == 1
    for rule, text in (("style-src", style[1]), ("script-src", script[0])):
        digest = base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()
        assert rules[rule] == f"'sha256-{digest}'"


def test_tables_have_captions_and_headings_in_scope(page: Made) -> None:
    tables = re.findall(r"<table>(.*?)</table>", page.text, re.DOTALL)
    assert len(tables) >= 10
    for table in tables:
        assert table.startswith("<caption>") and "<caption></caption>" not in table
        body = table.partition("<tbody>")[2]
        assert ('scope="col"' in table) == ("<thead>" in table)
        assert body.count('<th scope="row"') == body.count("<tr>")


def test_pictures_have_text_alternatives(read: Reader) -> None:
    drawn = [a for a in read.all("svg") if "aria-hidden" not in a]
    assert len(drawn) >= 9 and all(a["role"] == "img" and a["aria-labelledby"] for a in drawn)
    told = [text for tag, text in read.texts if tag == "desc"]
    assert len(told) == len(drawn) and all(len(text) > 40 for text in told)
    assert any("bed 4 from 364.0 to 396.2" in text for text in told)


def test_headings_follow_their_order(read: Reader) -> None:
    levels = [int(tag[1]) for tag, _ in read.elements if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1 and levels.count(1) == 1 and set(levels[1:]) == {2}
    assert read.all("html")[0]["lang"] == "en" and len(read.all("main")) == len(read.all("nav")) == 1


def luminance(colour: str) -> float:
    """Relative luminance of #rrggbb (WCAG 2.1)."""
    parts = [int(colour[k : k + 2], 16) / 255.0 for k in (1, 3, 5)]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


def test_texts_and_lines_stand_out(page: Made) -> None:
    """WCAG 2.1, 1.4.3 and 1.4.11: 4.5 for text, 3 for graphics; black on white is 21 (closed form)."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    style = files("reactorstage.report.page").joinpath("page.css").read_text(encoding="utf-8")
    colours = dict(re.findall(r"--([a-z]+): (#[0-9a-f]{6})", style))
    grounds = [colours["paper"], colours["band"]]
    texts = {colours[name] for name in ("ink", "quiet", "good", "link")}
    texts |= set(re.findall(r'<text[^>]* fill="(#[0-9a-f]{6})"', page.text))
    assert len(texts) >= 5
    assert [(text, ground) for text in texts for ground in grounds if contrast(text, ground) < 4.5] == []
    assert contrast(colours["paper"], colours["bad"]) >= 4.5
    lines = set(re.findall(r'<path class="line [a-z ]+"[^>]* stroke="(#[0-9a-f]{6})"', page.text))
    assert len(lines) >= 6
    assert [line for line in lines if contrast(line, colours["paper"]) < 3.0] == []


def test_it_is_byte_equal_on_repeat_and_small(page: Made, found: Optimisation) -> None:
    again = page_html(of_optimum(found))
    assert again.decode() == page.text
    assert len(again) < MOST_BYTES


def test_every_input_stands_there_as_given(page: Made, read: Reader) -> None:
    rows = given(page.subject.now.case)
    assert len(rows) > 40
    for row in rows:
        assert " ".join(row.text.split()) in read.words
    assert "activation energy 66 kJ/mol" in read.words and "from memory, check before use" in read.words


def test_the_summary_answers_the_first_questions(page: Made) -> None:
    facts = dict(summary_facts(page.subject))
    assert facts["Inside its limits?"][0] == "Yes, all 31 limits hold."
    assert "light-off, beds 1-4: 1 K more freedom saves 3.7 EUR/h" in facts["Which limits cost money?"][0]
    assert "from 384 to 364 degC" in facts["What to change first?"][0]
    assert any("No margin is kept" in text for text in facts["What to worry about?"])


def test_cautions_stand_there_in_full(read: Reader) -> None:
    for text in cautions.FULL:
        assert " ".join(text.split()) in read.words
    assert "instrument error alone can cross them" in read.words
    assert "benzene, ethylene, ethane, ethylbenzene, diethylbenzene: see the safety data" in read.words


def test_numbers_of_the_readout_are_those_of_the_profiles(page: Made) -> None:
    text = re.search(r'<script type="application/json" id="numbers">(.*?)</script>', page.text, re.DOTALL)
    assert text is not None
    data = json.loads(text[1])
    temperature = next(chart for chart in data["charts"] if chart["key"] == "temperature")["series"][0]
    for bed, profile in enumerate(page.subject.now.profiles):
        assert float(temperature["now"][bed][0]) == pytest.approx(profile.T[0] - 273.15, abs=0.051)
        assert float(temperature["now"][bed][-1]) == pytest.approx(profile.T[-1] - 273.15, abs=0.051)
        assert len(temperature["now"][bed]) == len(data["beds"][bed]["at"]) == len(temperature["x"][bed])
    today = page.subject.today
    assert today is not None
    assert float(temperature["today"][0][-1]) == pytest.approx(today.profiles[0].T[-1] - 273.15, abs=0.051)


def test_markup_in_a_case_is_escaped(hostile: Made) -> None:
    assert SCRIPT not in hostile.text and IMAGE not in hostile.text and "</script><b>" not in hostile.text
    assert hostile.text.count("<script") == 2 and "<img" not in hostile.text
    for text in (SCRIPT, IMAGE, "</script><b>"):
        assert escape(text, quote=False) in hostile.text.replace("&#34;", '"')
    Reader(hostile.text)


@pytest.mark.parametrize("name", [name for name in UNIT_SETS if name != "trade"])
def test_results_are_in_one_set_of_units(name: str, found: Optimisation) -> None:
    """Inputs stand as given; everything else is in the chosen set."""
    text = page_html(of_optimum(found), name).decode()
    shown = re.sub(
        r'<section id="inputs".*?</section>|<section id="kinetics".*?</section>', "", text, flags=re.DOTALL
    )
    shown = Reader(shown).words.replace("steam 28 bar", "").replace("steam 9 bar", "")
    assert all(scale.unit in shown for kind, scale in UNIT_SETS[name].scales.items() if kind == "power")
    own = {scale.unit for scale in UNIT_SETS[name].scales.values()} | {"K", "t", "m"}
    foreign = {units.KINDS[kind].display_unit for kind in UNIT_SETS[name].scales if kind in units.KINDS} - own
    assert [unit for unit in foreign if re.search(rf"\d {re.escape(unit)}(?![\w/(])", shown)] == []


def test_a_rating_has_a_page_that_promises_no_worths(hostile: Made) -> None:
    facts = dict(summary_facts(hostile.subject))
    assert facts["Inside its limits?"][:2] == (
        "No. Broken: 1 limit.",
        "coking, bed 4: 11.44 mol/mol, at least 11.6 mol/mol.",
    )
    assert "cannot tell" in facts["Which limits cost money?"][0]
    assert 'id="flatness"' not in hostile.text and "limits broken" in hostile.text


def test_limits_that_cannot_be_met_are_told(impossible: Optimisation) -> None:
    text = page_html(of_optimum(impossible)).decode()
    assert "no setting found meets them all" in text and "These limits cannot all be met." in text
    Reader(text)


def test_a_train_without_an_answer_still_has_a_page(page: Made, lead: Path) -> None:
    programme = reactorstage.compile(reactorstage.load(lead))
    failed = replace(
        page.subject.now, failure="bed 1 has no inlet", profiles=(), steps=(), status="no answer"
    )
    subject = replace(of_rating(programme, failed), today=None)
    text = page_html(subject).decode()
    assert "There is no answer: bed 1 has no inlet." in text and 'id="profiles"' not in text
    Reader(text)


@pytest.mark.parametrize(
    "setting", ["bed 2.state=bypassed", "every bed.catalyst activity=0", "bed 1.diameter=0.3 m"]
)
def test_odd_trains_have_whole_pages(setting: str, lead: Path) -> None:
    programme = reactorstage.compile(reactorstage.load(lead, [setting]))
    text = page_html(of_rating(programme, programme.rate(), overrides=[setting])).decode()
    assert setting in Reader(text).words and "nan" not in text.partition("<nav")[2].partition("<script")[0]


def test_an_aim_that_is_no_money_is_told_in_its_own_unit(lead: Path, folder: Path) -> None:
    text = lead.read_text(encoding="utf-8").replace(
        "aim: least money.total", "aim: most train.selectivity to ethylbenzene from ethylene"
    )
    path = folder / "selectivity.yaml"
    path.write_text(text, encoding="utf-8")
    subject = of_optimum(reactorstage.optimise(reactorstage.load(path), starts=3))
    facts = dict(summary_facts(subject))
    assert "the aim: most" in facts["What does it achieve?"][0] and "%" in facts["What does it achieve?"][0]
    Reader(page_html(subject).decode())


def test_a_reference_case_is_compared(page: Made, cases: Path) -> None:
    aged = reactorstage.load(cases / "selkemouth-aged-catalyst.yaml")
    subject = replace(page.subject, reference=Reference(aged.name, reactorstage.rate(aged)))
    words = Reader(page_html(subject).decode()).words
    assert "Against the reference case" in words and "Inputs that differ" in words
    assert "catalyst activity: 0.7" in words.partition("Inputs that differ")[2]
    assert "The reference breaks coking, bed 4" in words and "This setting is inside all limits." in words


def test_a_later_study_adds_its_section_in_one_place(page: Made, monkeypatch: pytest.MonkeyPatch) -> None:
    def upsets(subject: Subject) -> Section:
        return Section("upsets", "Upsets", (Words(f"{len(subject.now.profiles)} beds < 5"),))

    monkeypatch.setattr(render, "SECTIONS", (*SECTIONS, upsets))
    text = page_html(page.subject).decode()
    assert '<a href="#upsets">Upsets</a>' in text and "<p>4 beds &lt; 5</p>" in text
