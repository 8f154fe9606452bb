"""Sections of the page that explain an answer: moves, reach, flatness, drivers, certificate, conflicts."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import reactorstage
from reactorstage.errors import CallError
from reactorstage.face import Optimisation
from reactorstage.optimiser.reasons import Flatness, FlatNumber
from reactorstage.report.aim import aim_of
from reactorstage.report.certificate import curvature_text
from reactorstage.report.drivers import drivers
from reactorstage.report.page.chart import WIDTH, svg
from reactorstage.report.page.drivers import driver_chart
from reactorstage.report.page.names import BESIDE, LETTER, lines_of, name_labels, room_for
from reactorstage.report.page.render import page_html
from reactorstage.report.page.said import said
from reactorstage.report.page.sections.moves import in_all_text
from reactorstage.report.page.sections.reference import comparison
from reactorstage.report.page.sections.summary import summary_facts
from reactorstage.report.page.spans import span_charts
from reactorstage.report.page.subject import Reference, of_optimum
from tests.report.page.conftest import Made
from tests.report.page.test_page import Reader


def part(page: Made, key: str) -> str:
    """The words of one section."""
    found = re.search(rf'<section id="{key}".*?</section>', page.text, re.DOTALL)
    assert found is not None, key
    return Reader(found[0]).words


def test_every_part_of_the_explanation_has_its_section(page: Made) -> None:
    ids = re.findall(r'<section id="([a-z]+)"', page.text)
    assert ids[:3] == ["summary", "moves", "limits"]
    assert [one for one in ids if one in ("flatness", "drivers", "certificate")] == [
        "flatness",
        "drivers",
        "certificate",
    ]


def test_the_moves_stand_with_what_to_enter_and_add_up(page: Made, found: Optimisation) -> None:
    words, moves = part(page, "moves"), found.optimum.moves
    assert moves is not None and found.best is not None
    aim = aim_of(found.best)
    first = moves.moves[0]
    for k, value in zip(first.numbers, first.values, strict=True):
        number = found.programme.numbers[k]
        shown = value * 3.6 if number.kind == "molar flow" else value - 273.15
        assert f"{shown:g}" in words
    assert sum(move.gain for move in moves.moves) == pytest.approx(moves.start - moves.cost)
    assert (
        f"{aim.number(moves.gain)} EUR/h in all, of {aim.number(moves.start - found.optimum.best.cost)}"
        in words
    )


def test_the_summary_gives_the_first_move_in_values_that_can_be_entered(page: Made) -> None:
    facts = dict(summary_facts(page.subject))
    text = facts["What to change first?"][0]
    assert text.startswith("First set ethylene to bed 1 from 67 to 78 kmol/h with inlet of bed 1")
    assert "(listed below)" in text and "--explain" not in page.text
    assert "goes on paying for 14 K" in facts["Which limits cost money?"][0]


def test_what_holds_when_a_worth_ends_is_told(page: Made) -> None:
    words = part(page, "limits")
    assert "How far relaxing pays" in words and "valve (bed 1) holds" in words
    assert "save 1.7 together, 0.7 and 0.3 alone" in words
    assert "one step (1 K, 0.05 kmol/h) away from every limit costs" in words


def test_the_answers_stand_in_words_with_their_certificate(page: Made, found: Optimisation) -> None:
    words = part(page, "certificate")
    assert "front-loaded ethylene, all inlets cool" in words and "How each start ended" in words
    assert f"{found.optimum.evaluations} evaluations" in words
    assert "Optimality residual" not in part(page, "closure")


def test_flat_spans_are_drawn_where_they_are(found: Optimisation) -> None:
    flat = found.optimum.flatness
    assert flat is not None
    ranges = {number.name: (number.low, number.high) for number in found.programme.numbers}
    flows, temperatures = span_charts(flat, ranges)
    rows = [row for row in flat.numbers if row.kind == "temperature"]
    spans = [span for row in rows for span in row.spans]
    assert [bar.x for bar in temperatures.bars] == [
        pytest.approx((low - 273.15, high - 273.15)) for low, high in spans
    ]
    best = [mark.x for mark in temperatures.marks if mark.kind == "best"]
    today = [mark.x for mark in temperatures.marks if mark.kind == "was"]
    assert best == pytest.approx([row.best - 273.15 for row in rows])
    assert today == pytest.approx([row.today - 273.15 for row in rows])
    low, high = temperatures.x_range
    assert all(low <= x <= high for x in (*best, *today, *(x for bar in temperatures.bars for x in bar.x)))
    assert (
        len(flows.bars) >= 4 and "ethylene to bed 1: flat 55-78 kmol/h, best 78.1, today 67.0." in flows.alt
    )


def test_numbers_that_cannot_move_are_still_drawn() -> None:
    still = FlatNumber("bed 1.inlet temperature", "temperature", 0, 640.0, 640.0, ((640.0, 640.0),))
    (chart,) = span_charts(Flatness(1.0, (still,)), {})
    assert np.isfinite(chart.x_range).all() and chart.x_range[0] < chart.x_range[1]
    assert "search range" not in [words for _, _, words in chart.legend]
    assert "nan" not in svg(chart)


def test_drivers_point_to_the_side_of_their_change(found: Optimisation) -> None:
    assert found.best is not None
    rows = drivers(found.influences)[:12]
    chart = driver_chart(rows, aim_of(found.best))
    assert [np.sign(bar.x[1]) for bar in chart.bars] == [np.sign(row.change) for row in rows]
    low, high = chart.x_range
    assert all(low <= bar.x[1] <= high for bar in chart.bars)
    assert all(row.what.split(" of ")[-1].strip() for row in drivers(found.influences))


def test_what_is_not_possible_is_told_with_what_would_be_enough(impossible: Optimisation) -> None:
    subject = of_optimum(impossible)
    text = page_html(subject).decode()
    words = Reader(text).words
    assert "cannot be met together within the search ranges" in words
    assert "Possible if one gives way alone" in words or "Possible if more than one" in words
    assert 'id="flatness"' not in text and 'id="moves"' not in text and 'id="certificate"' in text
    assert "cannot be met" in dict(summary_facts(subject))["What to change first?"][0]


def test_without_a_smallest_conflict_the_least_amounts_are_told(impossible: Optimisation) -> None:
    unexplained = replace(impossible, optimum=replace(impossible.optimum, conflict_set=None))
    subject = of_optimum(unexplained)
    assert "would have to give way" in dict(summary_facts(subject))["What to change first?"][0]
    assert "would have to give way" in page_html(subject).decode()


def test_moves_that_need_not_be_made_are_told(page: Made, found: Optimisation) -> None:
    assert found.optimum.moves is not None and found.best is not None
    none = replace(found.optimum.moves, moves=(), note="today has no answer", x=None)
    subject = of_optimum(replace(found, optimum=replace(found.optimum, moves=none)))
    words = Reader(page_html(subject).decode()).words
    assert "There are no moves: today has no answer." in words
    assert "There are no moves that can be entered: today has no answer." in words


def test_what_moves_bring_in_an_aim_that_is_no_money(found: Optimisation) -> None:
    assert found.optimum.moves is not None and found.best is not None
    aim = replace(aim_of(found.best), kind="molar flow", quantity="train.made C", sign=-1.0, unit="kmol/h")
    text = in_all_text(found.optimum.moves, found.optimum.best.cost, aim)
    assert "bring train.made C forward by" in text and text.endswith("in all.")


def test_a_reference_is_compared_as_compare_does(page: Made, cases: Path) -> None:
    aged = reactorstage.load(cases / "selkemouth-aged-catalyst.yaml")
    rating = reactorstage.rate(aged)
    made = comparison(page.subject, rating)
    now, was = (one.number("money.total") for one in (page.subject.now, rating))
    assert now is not None and was is not None
    assert made.aim.change == pytest.approx(3600.0 * (now - was))
    assert "bed 1.inlet temperature" in [row.name for row in made.decisions]
    subject = replace(page.subject, reference=Reference(aged.name, rating))
    words = Reader(page_html(subject, "US").decode()).words.partition("Against the reference case")[2]
    assert "This setting costs" in words and "less than the reference" in words
    assert "Beds that differ" in words and "exit, degF" in words


def test_an_unlike_reference_is_told_and_nothing_more(page: Made, cases: Path) -> None:
    other = reactorstage.rate(reactorstage.load(cases / "quernthwaite-butadiene.yaml"))
    with pytest.raises(CallError, match="2 beds against 4"):
        comparison(page.subject, other)
    subject = replace(page.subject, reference=Reference("butadiene", other))
    words = Reader(page_html(subject).decode()).words
    assert "cannot be compared" in words and "2 beds against 4" in words


@pytest.mark.parametrize(
    ("line", "sentence"),
    [
        ("KEEP AWAY    none on slip: it is near", "No margin is kept on slip: it is near"),
        (
            "KEEP AWAY    2 K on slip: this costs 1.0 EUR/h.",
            "Margins are kept: 2 K on slip: this costs 1.0 EUR/h.",
        ),
        ("EQUAL SPLIT  of ethylene costs more.", "An equal split of ethylene costs more."),
        ("POSSIBLE IF  one gives way alone: x.", "Possible if one gives way alone: x."),
        ("CONFLICT     coking cannot be met.", "Coking cannot be met."),
        ("light-off is near", "Light-off is near"),
        ("", ""),
    ],
)
def test_lines_of_the_terminal_become_sentences(line: str, sentence: str) -> None:
    assert said(line) == sentence


@pytest.mark.parametrize(
    "name",
    ["hot", "cold bypass of exchanger interchanger", "a" * 90, "one name " * 12, "light-off, beds 1-4"],
)
def test_names_beside_rows_keep_to_their_room(name: str) -> None:
    room = room_for([name])
    lines = lines_of(name, room)
    assert 1 <= len(lines) <= 2 and all(LETTER * len(line) + BESIDE <= room + LETTER for line in lines)
    assert lines[0].startswith(name[:3]) and room <= 0.5 * WIDTH
    shifts = [label.shift[1] for label in name_labels(0.0, 0.0, name, room)]
    assert np.mean(shifts) == pytest.approx(4.0)


def test_a_flat_direction_is_told_in_words(found: Optimisation) -> None:
    assert found.best is not None
    aim = aim_of(found.best)
    assert "stays the same" in curvature_text(-1e-9, aim) and "stays the same" in curvature_text(0.0, aim)
    assert "does not rise" in curvature_text(-1.0, aim) and "rises by at least" in curvature_text(1.0, aim)
