"""Results in notebooks and scripts: tables, data frames, figures."""

from __future__ import annotations

import importlib
from pathlib import Path
from typing import Any

import pytest
from matplotlib.figure import Figure

import reactorstage as rs
from reactorstage.errors import CallError
from reactorstage.report.table import Column, Table, table
from reactorstage.report.table_html import heading_text, table_html


@pytest.fixture(scope="module")
def found(lead: Path) -> rs.Optimisation:
    return rs.optimise(rs.load(lead), starts=4)


def test_an_optimum_has_tables_by_name(found: rs.Optimisation) -> None:
    tables = rs.tables(found)
    assert list(tables) == ["beds", "gaps", "limits", "money", "worths"]
    assert all(isinstance(one, Table) and one.rows for one in tables.values())
    assert list(rs.tables(found.today)) == ["beds", "gaps", "limits", "money"]


def test_results_show_themselves_in_a_notebook(found: rs.Optimisation) -> None:
    for result in (found, found.today):
        shown = result._repr_html_()
        assert "Selkemouth Works" in shown and result.status in shown
        assert shown.count("<table>") == len(rs.tables(result))


def test_a_table_becomes_a_data_frame_of_numbers(found: rs.Optimisation) -> None:
    pytest.importorskip("pandas")
    frame = rs.tables(found)["beds"].to_pandas()
    assert frame["inlet degC now"].tolist() == pytest.approx([364.0] * 4)
    assert frame["t"].tolist() == [2.6, 3.0, 3.4, 4.3]
    kelvin = rs.tables(found, units="SI")["beds"].to_pandas()
    assert kelvin["inlet K now"].tolist() == pytest.approx([637.15] * 4, abs=0.06)
    assert rs.tables(found)["limits"].to_pandas()["allowed"][0].startswith("at ")


def test_without_pandas_one_sentence_says_what_to_do(
    found: rs.Optimisation, monkeypatch: pytest.MonkeyPatch
) -> None:
    def missing(name: str) -> Any:
        raise ImportError(name)

    monkeypatch.setattr(importlib, "import_module", missing)
    with pytest.raises(CallError, match="pandas is not installed; install it"):
        rs.tables(found)["beds"].to_pandas()


def test_figures_are_those_of_the_command_line(found: rs.Optimisation) -> None:
    figures = rs.figures(found)
    assert {"temperature", "heat", "worths"} <= set(figures)
    assert all(isinstance(figure, Figure) for figure in figures.values())
    assert "worths" not in rs.figures(found.today)


def test_the_page_is_one_text(found: rs.Optimisation) -> None:
    assert rs.page(found).startswith("<!doctype html>")
    assert "rating of the case as set" in rs.page(found.today)


def test_unknown_units_are_a_wrong_call(found: rs.Optimisation) -> None:
    for ask in (rs.tables, rs.figures, rs.page):
        with pytest.raises(CallError, match="no set of units called 'nautical'"):
            ask(found, "nautical")


def test_html_of_a_table_is_escaped_and_groups_its_headings() -> None:
    made = table(
        "BEDS",
        [
            Column(("",), ("<1>", "2")),
            Column(("now",), ("364.0*", "380.0!"), group=("inlet",)),
            Column(("was",), ("384", "384"), group=("inlet",)),
        ],
    )
    html = table_html(made, "a & b")
    assert "<caption>a &amp; b</caption>" in html and "&lt;1&gt;" in html
    assert '<th scope="colgroup" colspan="2">inlet</th>' in html
    assert '364.0<abbr title="a limit holds this">*</abbr>' in html
    assert '380.0<abbr title="this breaks a limit">!</abbr>' in html


def test_folded_headings_are_put_together() -> None:
    assert heading_text(Column(("diethyl-", "benzene", "kmol/h"), ())) == "diethylbenzene kmol/h"
    assert heading_text(Column(("benzene/", "ethylene", "at inlet"), ())) == "benzene/ethylene at inlet"
