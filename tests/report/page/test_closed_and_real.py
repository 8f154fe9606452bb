"""Pages and screens of trains with exchangers, recycles, several states and real fluids."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from reactorstage.commands.screens import rating_lines
from reactorstage.report import sentences
from reactorstage.report.closures import recycle_table, states_table
from reactorstage.report.display import in_units
from reactorstage.report.page.render import page_html
from reactorstage.report.page.sections.summary import summary_facts
from reactorstage.report.page.subject import Subject, of_rating
from reactorstage.report.phase import least_margin_text, margin_table, near_a_boundary
from reactorstage.train.result import Rating, Value
from tests.bed import fluid_cases
from tests.bed.build import Tree, programme
from tests.report.page.test_page import Reader
from tests.train.gap_cases import ammonia
from tests.train.test_gap_steps import looped


def subject_of(tree: Tree) -> Subject:
    made = programme(tree)
    return of_rating(made, made.rate())


@pytest.fixture(scope="module")
def closed() -> Subject:
    """A converter that heats its own feed, after a published one (see `gap_cases`), with three states."""
    return subject_of(ammonia())


@pytest.fixture(scope="module")
def real() -> Subject:
    return subject_of(fluid_cases.ammonia())


def test_the_page_of_a_closed_train_shows_exchanger_states_and_fold(closed: Subject) -> None:
    text = page_html(closed).decode()
    words = Reader(text).words
    assert "Exchangers" in words and "Folds: where two states meet and vanish" in words
    table = words.partition("States at this setting")[2].partition("All of these")[0]
    assert len(re.findall("stable by its slope", table)) == 2 and table.count("UNSTABLE") == 1
    assert "Closure of exchanger interchanger" in words
    assert "Limits: broken ones" not in words
    worries = dict(summary_facts(closed))["What to worry about?"]
    assert "UNSTABLE, a disturbance grows" in worries[0] and worries[1].startswith("Extinction:")


def test_states_and_their_notes_are_in_the_units_shown(closed: Subject) -> None:
    """Closed form: degF = 1.8 degC + 32; 1 MW = 3.412 million Btu/h (NIST SP 811)."""
    rating = closed.now
    shown = next(one for one in rating.closed.states if one.shown)
    with in_units("US"):
        notes = " ".join(sentences.notes(rating))
        cells = states_table(rating.closed).columns
    assert "degC" not in notes and "MW" not in notes
    assert f"{1.8 * (shown.T_first - 273.15) + 32.0:.0f} degF" in notes
    assert shown.heat is not None and cells[3].cells[0] == f"{shown.heat * 3.412141633e-6:.3f}"
    assert sentences.notes(rating) == list(rating.notes)


def test_one_state_needs_no_table(closed: Subject) -> None:
    alone = replace(closed.now.closed, states=closed.now.closed.states[:1])
    assert states_table(alone).rows == 0


def test_a_recycle_is_told_with_what_it_carries() -> None:
    rating = programme(looped()).rate()
    made = recycle_table(rating)
    assert made.columns[0].cells == ("quench",)
    flow = rating.number("recycle quench.flow")
    assert flow is not None and float(made.columns[1].cells[0]) == pytest.approx(3.6 * flow, abs=0.051)
    text = page_html(of_rating(programme(looped()), rating)).decode()
    assert "Recycles" in Reader(text).words


def test_the_page_of_a_real_gas_shows_its_data_and_margins(real: Subject) -> None:
    words = Reader(page_html(real).decode()).words
    assert "As understood: fluid Peng-Robinson 1976" in words and "acentric factor" in words
    table = words.partition("Distance to the dew point, K")[2].partition("Nearest to its dew point")[0]
    leaving = real.now.number("bed 2.exit dew point margin")
    assert leaving is not None and f"{leaving:.1f}" in table and "none" in table
    assert near_a_boundary(real.now) == ""


def moved(rating: Rating, name: str, value: float) -> Rating:
    changed = {**rating.quantities, name: Value(value, "temperature difference")}
    return replace(rating, quantities=changed)


@pytest.mark.parametrize(
    ("margin", "words"),
    [
        (4.0, "Nearest to its dew point: gap 1, by 4.0 K."),
        (-3.0, "A second phase: gap 1 is 3.0 K beyond its dew point."),
    ],
)
def test_a_stream_near_its_boundary_is_a_worry(real: Subject, margin: float, words: str) -> None:
    near = moved(real.now, "gap 1.dew point margin", margin)
    assert near_a_boundary(near) == least_margin_text(near) == words
    assert words in dict(summary_facts(replace(real, now=near)))["What to worry about?"]


def test_an_ideal_gas_has_no_such_table(closed: Subject) -> None:
    assert margin_table(closed.now).rows == 0 and least_margin_text(closed.now) == ""


@pytest.mark.parametrize("width", [80, 100, 160])
def test_screens_of_such_trains_keep_to_their_width(width: int, closed: Subject, real: Subject) -> None:
    for subject, title in ((closed, "EXCHANGERS"), (real, "DISTANCE TO THE DEW POINT, K")):
        lines = rating_lines(subject.now, 0.1, width)
        assert any(line.startswith(title) for line in lines)
        assert max(map(len, lines)) <= width


def test_a_note_that_a_warning_repeats_is_told_once(real: Subject) -> None:
    worries = dict(summary_facts(real))["What to worry about?"]
    assert sum("Heat of entry carries no price" in text for text in worries) == 1
