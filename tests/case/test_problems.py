"""What is wrong with a case is said at its place: line, the text above the caret, the words, the advice."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import pytest

from reactorstage.case.reading import load_data
from reactorstage.errors import CaseProblems, Problem

Problems = Callable[..., tuple[Problem, ...]]
LEAD = Path(__file__).parent / "data" / "lead.yaml"
ETHYLATION = "{at: 400 degC, is: 4.2e-3 kmol/(kg h bar^2), activation energy: 66 kJ/mol}"
COOL_2 = "- cool: {holds: bed 2.inlet temperature, heat to: every cooling level}"
RANGE_1 = "bar(a), inlet temperature: {now: 384 degC, from: 350 degC, to: 410 degC}"
LAST = "  - effluent:\n      - cool: {to: 190 degC, heat to: every cooling level}\n"

# old text, new text, line, text at the caret, message, advice
ONE_PROBLEM = [
    # keys and forms
    ("flow: 965", "flwo: 965", 40, "flwo", "'flwo' is not a key here", r"did you mean flow\?"),
    ("diameter: 1", "diametre: 1", 71, "diametre", "'diametre' is not a key", r"did you mean diameter\?"),
    ("    formula", "    formla", 13, "formla", "'formla' is not a key", r"did you mean formula\?"),
    ("- cool: {to:", "- cooll: {to:", 68, "cooll", "'cooll' is not a key", r"did you mean cool\?"),
    ("train:  ", "traim:  ", 49, "traim", "'traim' is not a key", r"did you mean train\?"),
    ("case: Selke", "case:\nsite: Selke", 1, "", "nothing is written here", "give a value"),
    (
        "fluid: {density: ideal gas, viscosity: 1.7e-5 Pa s}",
        "fluid: gas",
        20,
        "gas",
        "a mapping .* expected",
        "",
    ),
    (
        "    equation: benzene + ethylene <=> ethylbenzene\n",
        "",
        29,
        "ethylation",
        "equation is missing in ethyl",
        "",
    ),
    ("bed 1: {catalyst: 2.6 t, ", "bed 1: {", 54, "bed 1", "catalyst is missing in bed 1", ""),
    ("    temperature: 45 degC\n", "", 41, "ethylene:", "temperature is missing in ethylene", ""),
    ("format: 1", "format: 2", 2, "2", "format '2' is not known", "write format: 1"),
    ("least money", "fewest money", 3, "fewest", "cannot stand here", "`least NAME` or `most NAME`"),
    ("percent: mol", "percent: mole", 4, "mole", "'mole' is not a choice", r"did you mean mol\?"),
    ("currency: EUR", "currency: euro", 5, "euro", "'euro' cannot stand here", "three capital letters"),
    (
        "rate per: catalyst mass",
        "rate per: catalyst mas",
        24,
        "catalyst mas",
        "not a choice",
        "did you mean cat",
    ),
    ("    rate per: catalyst mass\n", "", 28, "ethylation", "rate per is missing in ethylation", ""),
    # numbers
    ("965 kmol/h", "965", 40, "965", "'965' has no unit: a molar flow such as 965 kmol/h or a mass flow", ""),
    ("965 kmol/h", "0 kmol/h", 40, "0 kmol", "'0 kmol/h' is not above 0 kmol/h", ""),
    ("965 kmol/h", "-5 t/h", 40, "-5 t", "'-5 t/h' is not above 0 t/h", ""),
    ("965 kmol/h", "[965 kmol/h]", 40, "flow", "a molar flow .* is expected here, not a list", ""),
    ("268 kmol/h", "268 Nm3/h", 42, "268 Nm3", "normal or standard volume", "kmol/h"),
    ("1.8 m", "1.8 K", 71, "1.8 K", "wrong unit: a length such as 1.8 m", ""),
    ("1.8 m", "0 m", 71, "0 m", "'0 m' is not above 0 m", ""),
    ("19.4 bar(a)", "19.4 bar", 54, "19.4 bar", "absolute or gauge", r"bar\(a\) or bar\(g\)"),
    ("1.7e-5 Pa s", ".nan", 20, ".nan", "not a finite number", ""),
    ("1.7e-5 Pa s", "1e999 Pa s", 20, "1e999", "not a finite number", ""),
    ("catalyst activity: 1.0", "catalyst activity: no", 75, "no", "'no' is not a number", ""),
    ("catalyst activity: 1.0", "catalyst activity: 12:30", 75, "12:30", "'12:30' is not a number", ""),
    ("catalyst: 3.0 t", "catalyst: -3.0 t", 58, "-3.0 t", "is below 0 t", ""),
    ("fraction: 0.41", "fraction: 1", 73, "1", "is not below 100 %", ""),
    ("temperature: 480 degC\n\n", "temperature: 0 K\n\n", 76, "0 K", "is not above -273.15 degC", ""),
    ("2.4 mm", "2,4 mm", 74, "2,4 mm", "between the digits", "after a point"),
    ("approach: 15 K", "approach: 15 degC", 79, "15 degC", "a difference of temperatures", "in K"),
    ("350 degC to 440 degC", "350 to 440 degC", 28, "350 to", "'350' has no unit: a temperature", ""),
    ("350 degC to 440 degC", "350 degC", 28, "350", "is not a range", "350 degC to 440 degC"),
    ("350 degC to 440 degC", "450 degC to 440 degC", 28, "450", "does not run upwards", ""),
    ("0.8671 J/(mol K^2)", "0.8671 J/(mol K)", 17, '"0.8671', r"wrong unit: J/\(mol K\^2\) is expected", ""),
    # free numbers
    ("now: 384", "now: 484", 54, "484", "'484 degC' lies outside its range 350 degC to 410 degC", "widen"),
    ("from: 350 degC, to: 410", "from: 410 degC, to: 350", 54, "410", "is not below to", "swap"),
    (
        RANGE_1,
        "bar(a), inlet temperature: {now: 384 degC}",
        54,
        "inlet temperature",
        "from is missing",
        "free number",
    ),
    ("from: 350", "form: 350", 54, "form", "'form' is not a key of a free number", "from"),
    # compositions and splits
    ("benzene: 100 %", "benzen: 100 %", 40, "benzen", "no species 'benzen'", r"did you mean benzene\?"),
    ("ethane: rest", "ethane: 0.1 %", 44, "composition", "sums to 99.95 %, not 100 %", "rest"),
    ("ethane: rest", "ethane: 0.1498 %", 44, "composition", "sums to 99.9998 %", "rest"),
    ("99.85 %", "101 %", 44, "101 %", "'101 %' is above 100 %", ""),
    (
        "99.85 %, ethane: rest",
        "99 %, ethane: rest, benzene: 2 %",
        44,
        "rest",
        "nothing is left for the rest",
        "",
    ),
    ("99.85 %", "rest", 44, "rest}", "`rest` is already taken by ethylene", "once"),
    ("bed 4: rest", "bed 4: 66 kmol/h", 46, "now", "sums to 267 kmol/h, not 268 kmol/h", "bed 4: rest"),
    ("bed 1: 67 kmol/h", "bed 1: 200 kmol/h", 46, "rest", "others sum to 334 kmol/h of 268 kmol/h", ""),
    ("bed 1: 67 kmol/h", "bed 1: 2 t/h", 46, "2 t/h", "not a molar flow like the flow", "unit of the flow"),
    ("bed 1: 67 kmol/h", "bed 1: 20 %", 46, "67 kmol/h, bed 3", "entries differ in kind", "all in %"),
    ("free: all", "free: [bed 1, bed 4]", 47, "free", "bed 4 takes the rest, so it is not free", ""),
    ("free: all", "free: bed 9", 47, "bed 9", "'bed 9' is not in this split", ""),
    # train
    ("- gap 2:", "- gab 2:", 59, "gab 2", "a section of the train is expected", "gap 1"),
    ("- take: benzene", "- inject: benzene", 51, "inject", "does not begin with a feed", "take"),
    (
        "      - inject: ethylene   ",
        "      - take: ethylene   ",
        53,
        "ethylene",
        "taken once, as the first",
        "inject",
    ),
    (
        "      - inject: ethylene\n" + f"      {COOL_2}",
        f"      {COOL_2}",
        46,
        "bed 2",
        "bed 2 has a share",
        "gap 1",
    ),
    ("holds: bed 2.inlet", "holds: bed 3.inlet", 57, "bed 3.", "the next bed is bed 2", "holds: bed 2"),
    (
        "holds: bed 2.inlet",
        "holds: bed 2.exit",
        57,
        "bed 2.exit",
        "cannot be held",
        "holds: bed 2.inlet temp",
    ),
    ("cool: {to: 190 degC", "cool: {holds: bed 5.inlet temperature", 68, "bed 5", "no bed follows", "to:"),
    (
        "- cool: {holds: bed 2.inlet temperature",
        "- cool: {to: 380 degC",
        58,
        "inlet temp",
        "no device makes bed 2.in",
        "gap 1",
    ),
    (COOL_2, "- cool: {heat to: air}", 57, "cool", "nothing says how much", "holds, to, heat removed"),
    (COOL_2, COOL_2.replace("holds", "to: 3 degC, holds"), 57, "cool", "holds and to are given together", ""),
    (COOL_2, f"{COOL_2}\n      {COOL_2}", 58, "bed 2.", "already held by another device", ""),
    (
        "heat to: every cooling level",
        "heat to: fired heater",
        57,
        "fired",
        "'fired heater' only heats",
        "steam 28",
    ),
    ("from: fired heater", "from: air", 52, "air", "'air' only cools", "fired heater"),
    (
        "from: fired heater",
        "from: fired heatr",
        52,
        "fired heatr",
        "no heat level 'fired heatr'",
        "did you mean fired",
    ),
    ("from: fired heater", "from: [fired heater, fired heater]", 52, "heat from", "named twice", ""),
    ("degC, heat to: every cooling level", "degC", 68, "cool", "heat to is missing in cool", ""),
    (LAST, "  - effluent:\n      - stop\n", 68, "stop", "a mapping .* expected", ""),
    (LAST, "", 49, "train", "the train has no effluent", "- effluent"),
    (LAST, LAST + "  - gap 4: []\n", 69, "gap 4", "gap 4 cannot follow effluent", "the end"),
    # beds
    ("inlet pressure: 19.4 bar(a), ", "", 54, "bed 1", "bed 1 has no inlet pressure", "inlet pressure"),
    ("bed 2: {", "bed 2: {inlet pressure: 19 bar(a), ", 58, "19 bar", "follows from bed 1", "bed 1 only"),
    (
        "  diameter: 1.8 m\n",
        "",
        54,
        "bed 1",
        "diameter is missing in bed 1, bed 2, bed 3, bed 4",
        "pressure drop",
    ),
    # reactions and species
    (
        "bar^2), activation energy: 66",
        "bar), activation energy: 66",
        31,
        "4.2e-3",
        r"kmol/\(kg h bar\^2\) is exp",
        "",
    ),
    (ETHYLATION, "3 kmol/h", 31, "3 kmol/h", r"kmol/\(kg h bar\^2\) is expected", "sum to 2"),
    (
        ETHYLATION,
        "{at: 400 degC, is: 3 kmol/(kg h bar^2)}",
        31,
        "400",
        "`at` has no meaning",
        "activation energy",
    ),
    (
        "driven by: partial pressure",
        "driven by: concentration",
        31,
        "4.2e-3",
        r"kmol/\(kg h \(kmol/m\^3\)\^2\)",
        "",
    ),
    (
        "orders: as written",
        "orders: {benzen: 1, ethylene: 1}",
        26,
        "benzen:",
        "no species 'benzen'",
        "benzene",
    ),
    ("orders: as written", "orders: 2", 26, "2", "orders are `as written` or", ""),
    (
        "{gas data: C6H6}",
        "{gas data: C6H6, formula: C6H6}",
        8,
        "formula",
        "both `gas data` and `formula`",
        "",
    ),
    ("{gas data: C6H6}", "{source: none}", 8, "benzene", "benzene has no data", "gas data: NAME"),
    ("    entropy: 435 J/(mol K)\n", "", 12, "diethylbenzene", "entropy missing in diethylbenzene", ""),
    (
        "gas data: C2H4",
        'gas data: "none.yaml:C2H4"',
        9,
        '"none',
        "there is no file 'none.yaml'",
        "folder of the case",
    ),
    # money, levels, limits
    ("62 EUR/kmol", "62 USD/kmol", 87, "62 USD", "'USD' is not the currency", "write EUR"),
    ("62 EUR/kmol", "-62 EUR/kmol", 87, "-62", "is negative", "no sign"),
    ("62 EUR/kmol", "62 kmol/h", 87, "62 kmol", "is not money for something", "EUR/kmol"),
    ("62 EUR/kmol", "62 EUR/year", 87, "62 EUR/year", "how many hours", "hours per year"),
    (
        "costs: 62 EUR/kmol",
        "costs: 1 EUR/kmol, earns: 1 EUR/kmol",
        87,
        "earns",
        "both `costs` and `earns`",
        "",
    ),
    (", costs: 62 EUR/kmol", "", 87, "by-product", "neither `costs` nor `earns`", ""),
    ("  by-product", "  total", 87, "total", "money.total has a meaning of its own", "another label"),
    ("34 EUR/MWh", "34 EUR/kmol", 80, "34 EUR/kmol", "a price on a power is written in EUR/MWh", ""),
    ("cools down to: 60 degC, ", "", 84, "air", "neither `heats up to` nor `cools down to`", ""),
    ("{cools down to: 60", "{heats up to: 90 degC, cools down to: 60", 84, "cools", "both `heats up to`", ""),
    ("  air:  ", "  unpriced:  ", 84, "unpriced", "has a meaning of its own", "another name"),
    (
        "of: every bed.exit",
        "of: evry bed.exit",
        90,
        "evry",
        "no 'evry bed' in this case",
        "did you mean every bed",
    ),
    (
        "of: every bed.exit temperature",
        "of: bed 7.exit temperature",
        90,
        "bed 7",
        "there is no 'bed 7'",
        "bed 4",
    ),
    (
        "of: effluent.flow of eth",
        "of: efluent.flow of eth",
        96,
        "efluent",
        "no 'efluent'",
        "did you mean effluent",
    ),
    (
        "of: every bed.exit temperature",
        "of: money",
        90,
        "money",
        "not the name of a quantity",
        "owner.quantity",
    ),
    ("least money.total", "least every bed.rise", 3, "least", "there is no 'every bed'", ""),
    ("at most: 424 degC, ", "", 90, "hot exit", "hot exit has no bound", "between"),
    ("at most: 424 degC", "at most: 424 foo", 90, "424 foo", "'foo' is not a known unit", ""),
    ("keep away: 0 K", "keep away: -1 K", 90, "-1 K", "'-1 K' is negative", ""),
    ("at most: 46 K", "at most: 46 K, soft: 5 K", 93, "5 K", "is not money", ""),
    ("at most: 46 K", "between: 40 K to 46 K", 93, "40 K", "two bounds are expected", "A and B"),
    (
        "at most: 46 K",
        "at least: 50 K, at most: 46 K",
        93,
        "50 K",
        "at least 50 K lies above at most 46 K",
        "",
    ),
    ("except: {gap 3", "except: {gap 4", 95, "gap 4", "no 'gap 4' to except", "gap 3"),
    ("at most: 46 K", "at most: 46 K, except: {bed 1: {}}", 93, "bed 1", "the exception has no bound", ""),
    ("kmol/h, why: vent", "kmol/h, except: {bed 1: {at most: 1 K}}", 96, "bed 1", "`except` belongs to", ""),
    ("  valve:", "  hot-exit:", 94, "hot-exit", "differ only in hyphens", "different names"),
    (
        "  ethane:       {",
        "  2 ethane:       {",
        10,
        "2 ethane",
        "cannot be the name of a species",
        "without",
    ),
]


@pytest.mark.parametrize(("old", "new", "line", "caret", "message", "hint"), ONE_PROBLEM)
def test_one_problem(
    problems: Problems, old: str, new: str, line: int, caret: str, message: str, hint: str
) -> None:
    found = problems((old, new))
    first = next(p for p in found if re.search(message, p.message))
    assert first.line == line
    assert first.source_line[first.column - 1 :].startswith(caret)
    assert re.search(hint, first.hint), first.hint


def test_a_problem_as_it_is_printed(problems: Problems) -> None:
    with pytest.raises(CaseProblems, match="is not a key here") as caught:
        raise CaseProblems(problems(("flow: 965", "flwo: 965")))
    assert str(caught.value).splitlines() == [
        f"{LEAD}:40:13: error: 'flwo' is not a key here",
        "      benzene: {flwo: 965 kmol/h, temperature: 250 degC, composition: {benzene: 100 %}}",
        "                ^",
        "    did you mean flow?",
    ]


def test_every_problem_comes_in_one_pass(problems: Problems) -> None:
    found = problems(
        ("percent: mol", "percent: mole"),
        ("1.7e-5 Pa s", "1.7e-5"),
        ("benzene: 100 %", "benzen: 100 %"),
        ("bed 4: rest", "bed 4: 66 kmol/h"),
        ("diameter: 1.8 m", "diametre: 1.8 m"),
        ("holds: bed 2.", "holds: bed 9."),
        ("34 EUR/MWh", "34 EUR/kmol"),
        ("of: every bed.rise", "of: evry bed.rise"),
    )
    assert [p.line for p in found] == [4, 20, 40, 46, 57, 71, 80, 93]


@pytest.mark.parametrize(("old", "new"), [(c[0], c[1]) for c in ONE_PROBLEM[:40]])
def test_one_fault_does_not_raise_a_crowd(problems: Problems, old: str, new: str) -> None:
    assert len(problems((old, new))) <= 3


def test_a_fault_in_every_bed_is_said_once(problems: Problems) -> None:
    assert len(problems(("diameter: 1.8 m", "diameter: 1.8"))) == 1


def test_sections_out_of_order(problems: Problems) -> None:
    found = problems(("- bed 2:", "- bed 3:"))
    words = [p.message for p in found]
    assert "bed 3 cannot follow gap 1" in words and "bed 3 stands here a second time" in words
    assert "the train begins with gap 1" in [
        p.message for p in problems(("  - entry:", "  - gap 1: []\n  - entry:"))
    ]


def test_needs_of_rate_bases(problems: Problems) -> None:
    factor = ("  bulk density: 640 kg/m^3\n", "  pressure drop factor: 0\n")
    (found,) = problems(factor, ("catalyst: 2.6 t", "catalyst: 4 m^3"))
    assert (
        "bulk density is missing in bed 1: needed for rates per catalyst mass with catalyst by volume"
        in found.message
    )
    units = [("kmol/(kg h bar^2)", "kmol/(m^3 h bar^2)")] * 3
    found, *_ = problems(factor, ("per: catalyst mass", "per: bed volume"), *units)
    assert "needed for rates per bed volume with catalyst by mass" in found.message
    found, *_ = problems(
        ("  void fraction: 0.41\n", "  pressure drop factor: 0\n"),
        ("per: catalyst mass", "per: void volume"),
        *units,
    )
    assert "void fraction is missing" in found.message and "rates per void volume" in found.message


def test_feeds_used_twice_and_never(problems: Problems) -> None:
    found = problems(("      - inject: ethylene   ", "      - inject: benzene   "))
    assert "benzene is used a second time" in [p.message for p in found]
    found = problems(("- take: benzene", "- take: benzen"))
    assert {p.message for p in found} == {"benzene is never used", "there is no feed 'benzen'"}


def test_an_irreversible_reaction_has_no_backward(problems: Problems) -> None:
    (found,) = problems(
        (
            "benzene + ethylene <=> ethylbenzene",
            "benzene + ethylene => ethylbenzene\n    backward: from Gibbs energies",
        )
    )
    assert "so it has no backward rate" in found.message


def test_a_range_or_free_bed_needs_a_rest(problems: Problems) -> None:
    found = problems(("bed 4: rest", "bed 4: 67 kmol/h"), ("free: all", "free: bed 1"))
    assert "no bed takes what is left" in found[0].message
    found = problems(("bed 4: rest", "bed 4: {now: 67 kmol/h, from: 0 kmol/h, to: 82 kmol/h}"))
    assert "bed 4 takes what is left, so it has no range" in found[0].message


def test_what_is_no_case_at_all() -> None:
    for text in ("3", "[a, b]", "just words"):
        with pytest.raises(CaseProblems, match="a case is a list of `key: value`"):
            load_data(text.encode(), Path("a.yaml"))
    with pytest.raises(CaseProblems, match="aim is missing"):
        load_data(b"case: 3", Path("a.yaml"))


def test_words_for_every_level_need_a_level(problems: Problems, lead_text: str) -> None:
    ladder = lead_text[lead_text.index("heat levels:") : lead_text.index("prices:")]
    found = problems((ladder, ""))
    assert {p.message for p in found} == {
        "there is no level for 'every cooling level'",
        "there is no heat level 'fired heater'",
    }
    assert [p.line for p in found] == [52, 57, 61, 65, 68]


def test_prices_per_year_need_hours(problems: Problems) -> None:
    (found,) = problems(("62 EUR/kmol", "62 EUR/(t year)"))
    assert "how many hours it runs" in found.message
