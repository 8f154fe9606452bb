"""Keys of rate laws, activities and isomers: what is read, and what is said about a mistake, at its place."""

from __future__ import annotations

import re
from collections.abc import Callable
from copy import deepcopy
from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml

from reactorstage.case import json_schema, law_units
from reactorstage.case.model import Activities, Case, Number, OwnEquilibrium, Raw
from reactorstage.case.units import UnitProblem
from reactorstage.case.written_rates import Constant, EquilibriumConstant, TermConstant
from reactorstage.errors import Problem

Problems = Callable[..., tuple[Problem, ...]]
LEAD = Path(__file__).parent / "data" / "lead.yaml"
CONSTANT = "{at: 400 degC, is: 4.2e-3 kmol/(kg h bar^2), activation energy: 66 kJ/mol}"
EQUATION = "benzene + ethylene <=> ethylbenzene\n"


def below(text: str) -> tuple[str, str]:
    """The change that adds lines to the first reaction."""
    return EQUATION, f"{EQUATION}    {text}\n"


def bed_1(text: str) -> tuple[str, str]:
    return "- bed 1: {catalyst: 2.6 t, ", f"- bed 1: {{catalyst: 2.6 t, {text}, "


def isomers(text: str) -> tuple[str, str]:
    """The change that makes a group of isomers of the lump."""
    inline = LEAD.read_text(encoding="utf-8").split("diethylbenzene:", 1)[1].split("\n\nfluid")[0]
    return f"diethylbenzene:{inline}", f"diethylbenzene: {{isomers: {text}}}"


# addition, text at the caret, message, advice
WRONG = [
    # constants
    (
        (CONSTANT, "{activation energy: 66 kJ/mol}"),
        "constant",
        "the constant has no value",
        "write `is: VALUE`",
    ),
    (
        (CONSTANT, "{exp of: {a: 3}}"),
        "constant",
        "the unit is missing: kmol/(kg h bar^2) is expected",
        "add `in",
    ),
    (
        (CONSTANT, "{exp of: {a: 3, b: -900 K}, in: kmol/(kg h bar)}"),
        "kmol/(kg h bar)}",
        "'kmol/(kg h bar)' is the wrong unit: kmol/(kg h bar^2) is expected",
        "rate per catalyst mass, driven by partial pressure, orders that sum to 2",
    ),
    (
        (CONSTANT, "{exp of: {b: 3 K}, in: kmol/(kg h bar^2)}"),
        "exp of",
        "a is missing in exp of",
        "plain number",
    ),
    ((CONSTANT, "{exp of: {a: 3, b: -900}, in: kmol/(kg h bar^2)}"), "-900", "'-900' has no unit: K is", ""),
    ((CONSTANT, "{exp of: {a: 3, d: 1 K}, in: kmol/(kg h bar^2)}"), "1 K", "wrong unit: 1/K is expected", ""),
    (
        (CONSTANT, "{is: 1 kmol/(kg h bar^2), exp of: {a: 3}}"),
        "exp of",
        "`is` and `exp of` are given together",
        "keep one",
    ),
    ((CONSTANT, "{is: 1 kmol/(kg h bar^2), in: kmol}"), "in: kmol}", "`in` has no meaning beside `is`", ""),
    (
        (CONSTANT, "{exp of: {a: 3}, in: kmol/(kg h bar^2), at: 300 K}"),
        "at: 300 K",
        "`at` has no meaning beside `exp of`",
        "",
    ),
    (
        (CONSTANT, "0 kmol/(kg h bar^2)"),
        "0 kmol",
        "the rate constant 0 kmol/(kg h bar^2) must be above zero",
        "",
    ),
    # denominators
    (below("slowed by: []"), "slowed by", "nothing stands in slowed by", "factors below the line"),
    (below("slowed by: [{power: 2}]"), "{power", "terms is missing", "plain numbers such as 1"),
    (below("slowed by: [{power: 0, terms: [1]}]"), "0, terms", "a factor to the power 0 is 1", ""),
    (below("slowed by: [{terms: [{orders: {ethylene: 1}}]}]"), "{orders", "constant is missing", ""),
    (
        below("slowed by: [{terms: [1, {constant: 0.3, orders: {ethylene: 1}}]}]"),
        "0.3",
        "'0.3' has no unit: 1/bar is expected",
        "driven by partial pressure, the orders of this term sum to 1",
    ),
    (
        below("slowed by: [{terms: [1, {constant: 0.3 1/bar, orders: {ethylene: 0.5}}]}]"),
        "0.3 1/bar",
        "'0.3 1/bar' has the wrong unit: 1/bar^0.5 is expected",
        "sum to 0.5",
    ),
    (
        below("slowed by: [{terms: [1, {constant: {exp of: {a: 1}, in: bar}, orders: {ethylene: 2}}]}]"),
        "bar}",
        "'bar' is the wrong unit: 1/bar^2 is expected",
        "sum to 2",
    ),
    (below("slowed by: [{terms: [1 bar]}]"), "1 bar", "'1 bar' has a unit: a plain number is expected", ""),
    (
        below("slowed by: [{terms: [1, {constant: 0.3 1/bar, orders: {ethylen: 1}}]}]"),
        "ethylen:",
        "there is no species 'ethylen'",
        "did you mean ethylene?",
    ),
    (
        below("slowed by: [{terms: [1, {constant: {is: 0.3 1/bar, at: 400 degC}, orders: {ethylene: 1}}]}]"),
        "400 degC",
        "`at` has no meaning without a heat",
        "add `heat`",
    ),
    # floors
    (
        below("floor: {ethylen: 0.01 %}"),
        "ethylen:",
        "there is no species 'ethylen'",
        "did you mean ethylene?",
    ),
    (below("floor: {ethylene: 20 %}"), "20 %", "'20 %' is above 10 %", ""),
    (below("floor: {ethylene: 0 %}"), "0 %", "'0 %' is not above 0 %", ""),
    # backward
    (below("backward: from experience"), "from exp", "'from experience' is not a choice here", "from Gibbs"),
    (below("backward: {}"), "backward", "equilibrium constant is missing in backward", ""),
    (
        below("backward: {equilibrium constant: {exp of: {a: -13, b: 12000 K}, in: bar}}"),
        "bar}",
        "'bar' is the wrong unit: bar^-1 or (kmol/m^3)^-1 is expected",
        "changes the number of moles by -1",
    ),
    (
        below("backward: {equilibrium constant: {is: 4.0, at: 400 degC, heat of reaction: -104 kJ/mol}}"),
        "4.0",
        "'4.0' has no unit: bar^-1 or (kmol/m^3)^-1 is expected",
        "",
    ),
    (below("power of K: 0"), "0", "'0' is not above 0", ""),
    # effectiveness
    (below("effectiveness: -0.3"), "-0.3", "'-0.3' is not above 0", ""),
    (below("effectiveness: {}"), "effectiveness", "nothing says how large it is", "exactly one of factor"),
    (below("effectiveness: {factor: 1, powers of T: [1]}"), "effect", "factor and powers of T are given", ""),
    (below("effectiveness: {powers of T: [1, 2]}"), "2]", "'2' has no unit: 1/K is expected", ""),
    (
        below("effectiveness: {powers of T: [1], powers of conversion: [1]}"),
        "powers of conv",
        "`powers of conversion` needs `conversion`",
        "conversion: {of: nitrogen, into: ammonia}",
    ),
    (
        below(
            "effectiveness: {Thiele: {size: 2 mm, diffusivity: 1e-6 m/s, key species: ethylene, shape: slab, "
            "particle density: 1200 kg/m^3}}"
        ),
        "1e-6 m/s",
        "'1e-6 m/s' has the wrong unit: m^2/s is expected",
        "",
    ),
    (
        below(
            "effectiveness: {Thiele: {size: 2 mm, diffusivity: 1e-6 m^2/s, key species: ethylene, "
            "shape: slob, particle density: 1200 kg/m^3}}"
        ),
        "slob",
        "'slob' is not a choice here",
        "did you mean slab?",
    ),
    # fugacity
    (
        below("driven by: fugacity"),
        "fugacity",
        "an ideal gas has no fugacities of its own",
        "write driven by: partial pressure",
    ),
    # beds
    (
        bed_1("catalyst activity: {ethylaton: 0.8}"),
        "ethylaton",
        "there is no reaction 'ethylaton'",
        "did you mean ethylation?",
    ),
    (bed_1("catalyst activity: {ethylation: -1}"), "-1", "'-1' is below 0", ""),
    (
        bed_1("activity along depth: [{at: 0 %, is: 20 %}]"),
        "activity along",
        "activity along depth has at least 2 entries",
        "straight lines",
    ),
    (
        bed_1("activity along depth: [{at: 30 %, is: 20 %}, {at: 30 %, is: 1}]"),
        "30 %, is: 1",
        "30 % of depth does not lie below 30 %",
        "from the inlet down",
    ),
    # isomers
    (isomers("[C6H6]"), "isomers", "isomers has at least 2 entries", "names in data files"),
    (
        isomers("[C6H6, {formula: C10H14}]"),
        "{formula",
        "entropy, standard pressure, heat capacity missing",
        "",
    ),
    (isomers("[C6H6, a.yaml:b]"), "a.yaml", "there is no file 'a.yaml'", "in the folder of the case"),
]


@pytest.mark.parametrize(("change", "caret", "message", "advice"), WRONG)
def test_one_mistake_is_said_at_its_place(
    problems: Problems, change: tuple[str, str], caret: str, message: str, advice: str
) -> None:
    (found,) = problems(change)
    assert message in found.message, found.message
    assert advice in found.hint, found.hint
    assert found.source_line[found.column - 1 :].startswith(caret), found.source_line[found.column - 1 :]


def test_both_sources_of_a_lump_are_refused(problems: Problems) -> None:
    (found,) = problems(("    formula: C10H14", "    isomers: [C6H6, C6H6]\n    formula: C10H14"))
    assert found.message == "diethylbenzene has both `isomers` and `formula`"


FORMS = {
    "constant": "{exp of: {a: 3.2, b: -5473 K, c: 0.5, d: 1e-4 1/K}, in: kmol/(kg h bar^2)}",
    "slowed by": "[{power: 2, terms: [1, {constant: {is: 0.3 1/bar, at: 400 degC, heat: -50 kJ/mol}, "
    "orders: {ethylene: 1}}, "
    "{constant: {exp of: {a: -9, b: 8619 K}, in: bar^-0.5}, orders: {benzene: 0.5}}]}, "
    "{power: 0.5, terms: [2.0, {constant: 3453.38, orders: {benzene: 1, ethylene: -1}}]}]",
    "backward": "{equilibrium constant: {exp of: {a: -13.2, b: 12600 K}, in: 1/bar}, "
    "may differ from Gibbs by: 20 %, heat may differ by: 8 kJ/mol}",
    "power of K": "0.5",
    "floor": "{ethylene: 0.01 %}",
    "effectiveness": "{powers of T: [-17.5, 0.077 1/K, -1.08e-4 1/K^2], powers of conversion: [6.9, -26.4], "
    "conversion: {of: ethylene, into: ethylbenzene}}",
}


def with_forms(text: str, **other: str) -> str:
    forms = {**FORMS, **other}
    lines = "".join(f"    {key}: {value}\n" for key, value in forms.items() if key != "constant")
    changed = text.replace(EQUATION, EQUATION + lines, 1).replace(CONSTANT, forms["constant"], 1)
    return changed


@pytest.fixture
def whole(read_lead: Callable[..., Case], lead_text: str) -> Case:
    return read_lead((lead_text, with_forms(lead_text)))


def test_every_form_is_read(whole: Case) -> None:
    law = whole.reactions["ethylation"]
    form = law.constant.exp_of
    assert form is not None
    assert (form.a, form.b, form.c, form.d) == (3.2, -5473.0, 0.5, 1e-4)
    assert law.slowed_by is not None
    first, second = law.slowed_by
    assert (first.power, len(first.terms), second.power) == (2.0, 3, 0.5)
    assert first.terms[0].constant.is_ == Raw("1") and first.terms[0].orders == {}
    assert (first.terms[1].constant.at, first.terms[1].constant.energy) == (673.15, -50e3)
    assert second.terms[1].orders == {"benzene": 1.0, "ethylene": -1.0}
    assert isinstance(law.backward, OwnEquilibrium)
    assert (law.backward.may_differ_from_Gibbs_by, law.backward.heat_may_differ_by) == (0.2, 8e3)
    assert (law.power_of_K, law.floor) == (0.5, {"ethylene": 1e-4})
    assert law.effectiveness is not None
    assert law.effectiveness.powers_of_T == (-17.5, 0.077, -1.08e-4)
    assert law.effectiveness.conversion is not None and law.effectiveness.conversion.into == "ethylbenzene"


def test_short_forms(read_lead: Callable[..., Case]) -> None:
    """A number for an effectiveness, a text for an equilibrium constant, 10 % and 5 kJ/mol when not said."""
    case = read_lead(below("effectiveness: 0.7\n    backward: {equilibrium constant: 4.1 1/bar}"))
    law = case.reactions["ethylation"]
    assert law.effectiveness is not None and law.effectiveness.factor == 0.7
    assert isinstance(law.backward, OwnEquilibrium)
    assert law.backward.equilibrium_constant.is_ == Raw("4.1 1/bar")
    assert (law.backward.may_differ_from_Gibbs_by, law.backward.heat_may_differ_by) == (0.1, 5e3)


def test_what_every_reaction_is_slowed_by_is_merged(read_lead: Callable[..., Case]) -> None:
    case = read_lead(
        ("    orders: as written\n", "    orders: as written\n    slowed by: [{terms: [1, 0.5]}]\n"),
        below("slowed by: [{terms: [3]}]"),
    )
    powers = [[t.constant.is_.text for t in r.slowed_by[0].terms] for r in case.reactions.values()]  # type: ignore
    assert powers == [["3"], ["1", "0.5"], ["1", "0.5"]]


def test_activities_by_reaction(read_lead: Callable[..., Case]) -> None:
    text = "catalyst activity: {ethylation: 0.8, transalkylation: {now: 0.6, from: 0.5, to: 1}}"
    case = read_lead(bed_1(text))
    found = next(section.bed for section in case.train if section.bed).catalyst_activity
    assert isinstance(found, Activities)
    assert found.now == 1.0 and found.each["ethylation"] == Number(0.8)
    assert found.each["transalkylation"] == Number(0.6, 0.5, 1.0)
    set_by_name = read_lead(bed_1(text), overrides=["bed 1.catalyst activity of ethylation=0.7"])
    found = next(section.bed for section in set_by_name.train if section.bed).catalyst_activity
    assert isinstance(found, Activities) and found.each["ethylation"] == Number(0.7)
    for name in ("bed 1.catalyst activity", "every bed.catalyst activity"):
        others = read_lead(bed_1(text), overrides=[f"{name}=0.9"])
        found = next(section.bed for section in others.train if section.bed).catalyst_activity
        assert isinstance(found, Activities) and (found.now, found.each["ethylation"].now) == (0.9, 0.8)


def test_an_activity_along_depth(read_lead: Callable[..., Case]) -> None:
    case = read_lead(bed_1("activity along depth: [{at: 0 %, is: 20 %}, {at: 0.3, is: 1}]"))
    points = next(section.bed for section in case.train if section.bed).activity_along_depth
    assert points is not None and [(one.at, one.is_) for one in points] == [(0.0, 0.2), (0.3, 1.0)]


def test_isomers(read_lead: Callable[..., Case]) -> None:
    case = read_lead(isomers("[C6H6, {gas data: C2H4}]"))
    found = case.species["diethylbenzene"].isomers
    assert found is not None and [one.gas_data for one in found] == ["C6H6", "C2H4"]


def test_the_schema_knows_every_form(lead_text: str) -> None:
    validator = jsonschema.Draft7Validator(json_schema())

    def fits(text: str) -> bool:
        return validator.is_valid(yaml.safe_load(text))

    assert fits(with_forms(lead_text))
    assert fits(lead_text.replace(*bed_1("catalyst activity: {every reaction: 1, ethylation: 0.8}"), 1))
    assert fits(lead_text.replace(*isomers("[C6H6, {gas data: C2H4}]"), 1))
    for key, wrong in (
        ("constant", "{exp of: {b: 3 K}}"),
        ("constant", "{activation energy: 66 kJ/mol}"),
        ("slowed by", "[{power: 2}]"),
        ("backward", "{may differ from Gibbs by: 20 %}"),
        ("effectiveness", "{}"),
        ("effectiveness", "{Thiele: {size: 2 mm}}"),
    ):
        assert not fits(with_forms(lead_text, **{key: wrong})), (key, wrong)


# text, driver, sum of orders, SI value: 1 atm = 101 325 Pa
@pytest.mark.parametrize(
    ("text", "driver", "orders", "expected"),
    [
        ("0.3 1/bar", "partial pressure", 1.0, 3e-6),
        ("0.3 bar^-1", "fugacity", 1.0, 3e-6),
        ("2 1/atm^0.5", "partial pressure", 0.5, 2.0 / 101_325.0**0.5),
        ("5 m^3/kmol", "concentration", 1.0, 5e-3),
        ("5 bar", "partial pressure", -1.0, 5e5),
        ("3453.38", "partial pressure", 0.0, 3453.38),
        ("12 %", "mole fraction", 2.0, 0.12),
    ],
)
def test_constants_of_terms(text: str, driver: str, orders: float, expected: float) -> None:
    assert law_units.term_constant(TermConstant(**{"is": text}), driver, orders) == pytest.approx(expected)


@pytest.mark.parametrize(
    ("text", "change", "expected", "driver"),
    [
        ("235.8 atm^-0.5", -0.5, 235.8 / 101_325.0**0.5, "partial pressure"),
        ("4.2e-5 bar^-2", -2.0, 4.2e-15, "partial pressure"),
        ("3 kmol/m^3", 1.0, 3e3, "concentration"),
        ("0.007", 0.0, 0.007, ""),
    ],
)
def test_equilibrium_constants(text: str, change: float, expected: float, driver: str) -> None:
    found, of = law_units.equilibrium_constant(EquilibriumConstant(**{"is": text}), change)
    assert (found, of) == (pytest.approx(expected, rel=1e-13), driver)


def test_the_unit_of_an_exponential() -> None:
    given = Constant(**{"exp of": {"a": "1"}, "in": "kmol/(kg h atm^2)"})
    found = law_units.rate_constant(given, "catalyst mass", "partial pressure", 2.0)
    assert found == pytest.approx(1e3 / 3600.0 / 101_325.0**2)
    with pytest.raises(UnitProblem, match=re.escape("wrong unit: kmol/(kg h bar) is expected")):
        law_units.rate_constant(given, "catalyst mass", "partial pressure", 1.0)


def test_damage_to_any_form_gives_a_case_or_problems(lead_text: str) -> None:
    """Every value of the forms, replaced by something else: never another exception."""
    from reactorstage.case.reading import load_data
    from reactorstage.errors import CaseProblems

    tree = yaml.safe_load(with_forms(lead_text))
    law = tree["reactions"]["ethylation"]
    for path in list(paths(law)):
        for wrong in ("x", "-3 bar", ["1"], {}):
            damaged = deepcopy(tree)
            inner: Any = damaged["reactions"]["ethylation"]
            for key in path[:-1]:
                inner = inner[key]
            inner[path[-1]] = wrong
            try:
                load_data(yaml.safe_dump(damaged).encode(), LEAD)
            except CaseProblems as found:
                assert all(problem.message for problem in found.problems)


def paths(tree: Any, before: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """Paths of everything inside a tree."""
    items = tree.items() if isinstance(tree, dict) else enumerate(tree) if isinstance(tree, list) else ()
    return [p for key, value in items for p in [(*before, key), *paths(value, (*before, key))]]
