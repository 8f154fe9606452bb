"""What the tables and sentences say of made-up results."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np

from reactorstage.commands.screens import optimum_lines
from reactorstage.optimiser.result import EqualSplit
from reactorstage.report import bounds, sentences
from reactorstage.report.accounts import accounts, heat_words
from reactorstage.report.beds import bed_table
from reactorstage.report.changes import changes, moves_text
from reactorstage.report.gaps import gap_table
from reactorstage.report.result_json import optimum_json
from reactorstage.report.table import Column, Table
from reactorstage.train.result import Rating, Value
from tests.report import synthetic


def column(table: Table, *words: str) -> Column:
    """The column whose heading, group included, has all the words."""
    found = [c for c in table.columns if all(word in " ".join((*c.group, *c.heading)) for word in words)]
    assert len(found) == 1, words
    return found[0]


def cells(table: Table, *words: str) -> list[str]:
    return [cell.strip() for cell in column(table, *words).cells]


def headings(table: Table) -> str:
    return " ".join(" ".join((*c.group, *c.heading)) for c in table.columns)


def test_bed_table_stands_today_beside_the_new_setting() -> None:
    table = bed_table(synthetic.rating(), synthetic.rating(synthetic.TODAY))
    assert cells(table, "inlet degC", "now") == ["364.0*", "364.0*", "364.0*", "397.9"]
    assert cells(table, "inlet degC", "was") == ["384"] * 4
    assert cells(table, "ethylene in", "now") == ["77.0", "74.9", "69.1", "47.0"]
    assert cells(table, "rise at", "90 %") == ["65", "62", "62", "33"]
    assert cells(table, "diethyl-", "kmol/h") == ["1.46", "4.20", "6.18", "5.45"]


def test_stars_stand_at_limits_at_work_and_nowhere_else() -> None:
    table = bed_table(synthetic.rating())
    starred = {i: cell.strip() for c in table.columns for i, cell in enumerate(c.cells) if "*" in cell}
    assert cells(table, "exit")[3] == "424.0*"
    assert cells(table, "rise", "K")[0] == "46.0*"
    assert starred


def test_broken_limits_carry_a_mark_of_their_own() -> None:
    table = bed_table(synthetic.rating(synthetic.TODAY))
    assert cells(table, "exit")[0] == "424.3!"
    assert cells(table, "at inlet")[3] == "11.40!"


def test_a_rating_alone_says_neither_now_nor_was() -> None:
    words = headings(bed_table(synthetic.rating())).split()
    assert "was" not in words and "now" not in words


def test_a_ratio_that_does_not_exist_is_a_dash() -> None:
    beds = (synthetic.LEAD[0], replace(synthetic.LEAD[1], ratio=None))
    assert cells(bed_table(synthetic.rating(beds)), "at inlet") == ["12.55", "-"]


def test_a_peak_is_shown_only_where_it_exceeds_the_exit() -> None:
    plain = synthetic.rating()
    assert "peak" not in headings(bed_table(plain))
    hot = replace(plain.quantities["bed 2.peak temperature"], value=440.0 + 273.15)
    peaked = replace(plain, quantities={**plain.quantities, "bed 2.peak temperature": hot})
    assert cells(bed_table(peaked), "peak") == ["-", "440.0", "-", "-"]


def test_tables_serve_other_species_without_split_and_prices() -> None:
    names = synthetic.Names("oxygen", "sulfur dioxide", "sulfur trioxide", "", "oxidation", "none")
    options = synthetic.Options(names, split=False, priced=False)
    rating = synthetic.rating(synthetic.LEAD[:3], options)
    table = bed_table(rating)
    assert "ethyl" not in headings(table)
    assert cells(table, "sulfur", "gone") == ["95.0"] * 3
    gaps = headings(gap_table(rating))
    assert "EUR" not in gaps and "injection" not in gaps and "heat removed" in gaps
    assert heat_words(rating) == "no heat levels"


def test_gap_table_has_signs_in_words_and_marks_unpriced_heat() -> None:
    table = gap_table(synthetic.rating(), synthetic.rating(synthetic.TODAY))
    assert cells(table, "heat removed", "now") == ["-5.107", "1.750", "1.787", "0.000*", "10.922"]
    assert cells(table, "EUR/h", "cost +")[-1] == "unpriced (!)"
    assert cells(table, "injection")[-1] == "-"
    assert "effluent unpriced (!)" in heat_words(synthetic.rating())


def test_limits_table_names_every_broken_one_in_words() -> None:
    rating = synthetic.rating(synthetic.TODAY)
    table = bounds.rating_table(rating)
    states = table.columns[4].cells
    assert [cell for cell in states if "BROKEN" in cell] == ["BROKEN !"] * 2
    assert table.columns[0].cells[:2] == ("hot exit, bed 1", "coking, bed 4")
    assert table.columns[3].cells[0] == "-0.30 K"


def test_a_soft_limit_is_beyond_at_its_price_and_not_broken() -> None:
    rating = synthetic.rating(synthetic.TODAY)
    soft = tuple(replace(s, soft=True) if s.label == "hot exit" else s for s in rating.limits)
    rating = replace(rating, limits=soft)
    assert bounds.together(bounds.broken(rating)) == ["coking (bed 4)"]
    assert "beyond, at its price" in bounds.rating_table(rating).columns[4].cells
    assert "424.3!" not in cells(bed_table(rating), "exit")


def test_many_broken_limits_are_all_listed() -> None:
    beds = [replace(synthetic.LEAD[3], exit=430.0)] * 12
    rating = synthetic.rating(beds)
    table = bounds.rating_table(rating)
    names = [cell for cell in table.columns[0].cells if cell.startswith("hot exit")]
    assert len(names) == 12
    assert sum("BROKEN" in cell for cell in table.columns[4].cells) == len(bounds.broken(rating))


def test_worths_are_per_hour_and_step() -> None:
    outcome = synthetic.optimisation()
    table = bounds.worth_table(outcome.optimum, outcome.best)
    assert table.columns[0].cells[1] == "light-off, beds 1-3"
    assert table.columns[1].cells[0] == "at most 424 degC"
    assert [c.strip() for c in table.columns[2].cells] == ["1 K", "1 K", "0.1 mol/mol", "1 K"]
    assert cells(table, "relax", "saves") == ["2.2", "3.9", "0.4", "0.0"]
    assert cells(table, "tighten", "costs") == ["2.8", "4.5", "0.5", "-"]


def test_next_limits_are_of_labels_that_are_not_at_work() -> None:
    text = bounds.next_text(synthetic.rating())
    assert text == "Next: cooler, gap 2: 1.79 of 2 MW; slip, effluent: 1.1 of 1.35 kmol/h."


def test_money_is_compared_label_by_label() -> None:
    rows = accounts(synthetic.rating(), synthetic.rating(synthetic.TODAY, synthetic.Options(total=1409.3)))
    assert [row.label for row in rows] == ["by-product", "entry heat", "gap heat", "total"]
    assert rows[0].text == "by-product 1072.0 (-38.4)"
    assert rows[-1].text == "total 1319.7 (-89.6)"
    assert sum(row.now for row in rows[:-1]) > 0


def test_the_biggest_change_comes_first_and_like_changes_together() -> None:
    old, new = synthetic.user_numbers(synthetic.TODAY), synthetic.user_numbers(synthetic.LEAD)
    found = changes(synthetic.numbers(synthetic.TODAY), np.array(old), np.array(new))
    assert found[0].what == "inlet temperature of beds 1-3"
    assert moves_text(found, 1) == "inlet temperature of beds 1-3 from 384 to 364 degC"
    assert any(change.what == "ethylene to bed 1" for change in found)


def test_numbers_that_hardly_move_are_no_change() -> None:
    x = np.array(synthetic.user_numbers(synthetic.TODAY))
    assert changes(synthetic.numbers(synthetic.TODAY), x, x + 0.1) == []


def test_sentences_of_the_lead_outcome() -> None:
    outcome = synthetic.optimisation()
    first = sentences.first_change(outcome.programme, outcome.best, outcome.today)
    assert first.startswith("Change first: inlet temperature of beds 1-3 from 384 to 364 degC")
    assert "89.6 EUR/h less than today" in first
    second = sentences.second_answer(outcome.programme, outcome.optimum, outcome.best, outcome.others)
    apart = "A second answer (inlet of bed 4 at 364 instead of 398 degC)"
    assert second == f"{apart} costs 18.4 EUR/h more; 12 of 24 starts reached the best."
    assert sentences.today_text(outcome.today) == "Today breaks hot exit (bed 1) and coking (bed 4)."


def test_an_aim_that_is_not_money_is_told_in_its_own_unit() -> None:
    outcome = synthetic.optimisation()
    aim = SimpleNamespace(direction="most", quantity="train.conversion of ethylene")

    def aimed(rating: Rating, conversion: float) -> Rating:
        case = SimpleNamespace(**{**vars(rating.case), "aim": aim})
        value = Value(conversion, "fraction")
        return replace(rating, case=case, quantities={**rating.quantities, aim.quantity: value})

    best, today, other = (
        aimed(rating, value)
        for rating, value in ((outcome.best, 0.996), (outcome.today, 0.99), (outcome.others[0], 0.994))
    )
    first = sentences.first_change(outcome.programme, best, today)
    assert first.endswith("all changes together: train.conversion of ethylene better by 0.60 % than today.")
    second = sentences.second_answer(outcome.programme, outcome.optimum, best, [other])
    assert " is worse by 0.20 %; " in second
    worths = bounds.worth_table(outcome.optimum, best)
    assert worths.title == "LIMITS AT WORK (*), train.conversion of ethylene in %"
    assert cells(worths, "relax", "saves")[0] == f"{100 * 2.2 / 3600:.2g}"
    content = optimum_json(outcome.programme, outcome.optimum, today, best, [other], 1)
    assert content["worths"][0]["saving unit"] == "%"


def test_today_without_an_answer_is_not_compared() -> None:
    outcome = synthetic.optimisation()
    today = replace(outcome.today, failure="bed 1 runs away", quantities={}, money={}, profiles=())
    first = sentences.first_change(outcome.programme, outcome.best, today)
    assert first.endswith("from 384 to 397.9 degC.")
    outcome.today = today
    text = " ".join("\n".join(optimum_lines(outcome, 100)).split())
    assert "Today's setting has no answer: bed 1 runs away." in text and " was " not in text


def test_one_answer_and_nothing_to_change_are_said_so() -> None:
    outcome = synthetic.optimisation(others=0)
    text = sentences.second_answer(outcome.programme, outcome.optimum, outcome.best, outcome.others)
    assert text == "All 24 starts that ended agree on this answer."
    same = sentences.first_change(outcome.programme, outcome.best, outcome.best)
    assert same == "Today's setting is already the best one found."


def test_equal_split_says_what_it_costs_and_what_must_give_way() -> None:
    outcome = synthetic.optimisation()
    text = sentences.equal_split_text(outcome.optimum.equal_splits[0], outcome.best)
    assert "costs 7.9 EUR/h more (0.6 %) even with coking (bed 4) relaxed by 0.3 mol/mol" in text
    none = EqualSplit("ethylene", None, None, None, note="no start ended")
    assert sentences.equal_split_text(none, outcome.best).endswith("no start ended.")


def test_limits_without_a_margin_are_pointed_out_and_margins_have_a_price() -> None:
    outcome = synthetic.optimisation()
    assert "none on light-off, rise, coking, hot exit and cooler" in sentences.margin_text(
        outcome.optimum, outcome.best
    )
    kept = tuple(replace(s, keep_away=2.0 if s.label == "hot exit" else 0.0) for s in outcome.best.limits)
    optimum = replace(outcome.optimum, keep_away_cost=17.9 / 3600)
    text = sentences.margin_text(optimum, replace(outcome.best, limits=kept))
    assert text == "KEEP AWAY    2 K on hot exit: this costs 17.9 EUR/h."


def test_notes_of_the_rating_are_told_but_for_unpriced_heat() -> None:
    unlit = "Bed 2 is practically unlit: it rises 1 K of a possible 39 K."
    rating = replace(synthetic.rating(), notes=(unlit, "Heat of effluent carries no price."))
    assert sentences.warnings(rating) == [unlit]
