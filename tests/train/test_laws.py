"""Rate laws of every form through a whole case: what is refused when it is compiled, and what comes out."""

from __future__ import annotations

from copy import deepcopy
from math import exp
from typing import Any

import numpy as np
import pytest

from reactorstage.chemistry.rates import ln_K_of_laws, rates
from reactorstage.chemistry.reaction import ln_Q
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.parameters import FormRows, Parameter, parameters_of, sensitivities, shifted
from reactorstage.train.programme import TrainProgramme, compile_case, compile_model
from tests.bed.build import Tree, changed, load, one_bed, programme
from tests.chemistry.published_laws import EKLUND, LAWS, SO2

FEED = {"flow": "1000 kmol/h", "temperature": "700 K", "composition": LAWS["Eklund"][2]}
NO_SO3 = {**FEED, "composition": {"SO2": "10 %", "O2": "11 %", "N2": "rest"}}
RANGE = {"now": "700 K", "from": "690 K", "to": "710 K"}
PLAIN = {
    "equation": "SO2 + 0.5 O2 <=> SO3",
    "rate per": "catalyst mass",
    "driven by": "mole fraction",
    "orders": {"SO2": 1, "O2": 1},
    "constant": {"at": "700 K", "is": "20 mol/(kg s)", "activation energy": "60 kJ/mol"},
}


def case(law: Tree, feed: Tree = FEED, catalyst: str = "2 t", **more: Any) -> Tree:
    return one_bed(SO2, {"oxidation": law}, feed, catalyst, "1.3 bar(a)", **more)


def problems(tree: Tree) -> tuple[Problem, ...]:
    with pytest.raises(CaseProblems) as caught:
        compile_case(load(tree))
    return caught.value.problems


def without(law: Tree, key: str) -> Tree:
    return {name: value for name, value in law.items() if name != key}


def test_a_floor_is_asked_for_where_a_species_may_be_absent() -> None:
    law = without(EKLUND, "floor")
    (found,) = problems(case(law, NO_SO3))
    assert found.message == (
        "a floor for SO3 is missing: SO3 may be absent (the feeds of the entry do not hold it), "
        "and its order in the forward rate is -0.5"
    )
    assert found.hint == "add `floor: {SO3: 0.01 %}` to oxidation"
    assert not compile_case(load(case(law))).rate().failure


def test_a_reactant_of_negative_order_that_can_be_used_up_needs_a_floor() -> None:
    """Of the reactants of an irreversible reaction the one that runs out first."""
    law = {**PLAIN, "equation": "SO2 + 0.5 O2 => SO3", "orders": {"SO2": -0.5, "O2": -0.5}}
    (found,) = problems(case(law))
    assert (
        "SO2 may be absent (oxidation can use it up), and its order in the forward rate is -0.5"
        in found.message
    )


def test_a_floor_holds_a_sum_below_the_line_that_the_feed_leaves_empty() -> None:
    """The bed against the rates of the chemistry floor along it, and its slopes against differences."""
    term = {"constant": {"at": "700 K", "is": 3, "heat": "-20 kJ/mol"}, "orders": {"SO3": 1}}
    law = {**PLAIN, "slowed by": [{"power": 2, "terms": [term]}]}
    (found,) = problems(case(law, NO_SO3))
    assert found.message.endswith("and a sum below the line is zero without it")
    train = programme(case({**law, "floor": {"SO3": "5 %"}}, {**NO_SO3, "temperature": RANGE}, "3 kg"))
    along, chemistry = train.rate().profiles[0], train.model.chemistry
    for k in (0, len(along.w) // 2, -1):
        r = rates(chemistry.laws, chemistry.table, along.F[k], along.T[k], along.p[k], np.ones(1))
        assert along.r[k] == pytest.approx(r, rel=1e-9)
    x, exit_ = train.now, "bed 1.exit temperature"
    ends = [train.rate(x + step).number(exit_) for step in (-0.05, 0.05)]
    slope = sensitivities(train, parameters=["feed fresh.temperature"], quantities=[exit_]).derivatives[0, 0]
    assert slope == pytest.approx((ends[1] - ends[0]) / 0.1, rel=1e-4)  # type: ignore[operator]


@pytest.mark.parametrize("order", [-0.5, 0.0, 0.5])
def test_a_floor_lets_a_reactant_run_out(order: float) -> None:
    law = {**PLAIN, "equation": "SO2 + 0.5 O2 => SO3", "orders": {"SO2": order}, "floor": {"SO2": "0.01 %"}}
    rating = programme(case(law, catalyst="200 t")).rate()
    assert not rating.failure
    assert rating.number("bed 1.exit flow of SO2") == pytest.approx(0.0, abs=1e-7)


BY_CONVERSION = {
    "powers of T": [1],
    "powers of conversion": [1],
    "conversion": {"of": "SO3", "into": "SO2"},
}
PARTICLE = {
    "size": "2 mm",
    "diffusivity": "2e-6 m^2/s",
    "key species": "SO2",
    "shape": "sphere",
    "particle density": "1200 kg/m^3",
}


@pytest.mark.parametrize(
    ("law", "message"),
    [
        ({"floor": {"SO2": "1 %"}}, "oxidation: a floor of SO2 changes nothing: its orders are whole"),
        ({"effectiveness": BY_CONVERSION}, "oxidation: a conversion is that of a species that is consumed"),
        (
            {"effectiveness": {"Thiele": {**PARTICLE, "key species": "N2"}}},
            "oxidation: N2 is not consumed, so it cannot be the key species",
        ),
    ],
)
def test_what_no_law_can_be(law: Tree, message: str) -> None:
    (found,) = problems(case({**PLAIN, **law}))
    assert message in found.message


def test_an_effectiveness_below_zero_is_refused() -> None:
    """1.9 - 2e-3 T is zero at 950 K; without `valid` a law is looked at up to 150 K above the inlet."""
    law = {**PLAIN, "effectiveness": {"powers of T": ["1.9", "-2e-3 1/K"]}}
    assert compile_case(load(case(law))).model.chemistry.laws.eta_kind[0] == 1
    (found,) = problems(case({**law, "valid": {"temperature": "400 degC to 700 degC"}}))
    assert found.message == "the effectiveness is -0.0463 at 700 degC"


# K of SO2 + 0.5 O2 = SO3 at 1 bar from the Gibbs energies of Cantera's data, 286.2 atm^-1/2 at 700 K (TH-3).
@pytest.mark.parametrize(
    ("K", "words"),
    [
        ({"is": "286.2 atm^-0.5", "at": "700 K", "heat of reaction": "-98.7 kJ/mol"}, ""),
        ({"is": "286.2 bar^-0.5", "at": "700 K", "heat of reaction": "-98.7 kJ/mol"}, ""),
        ({"is": "200 atm^-0.5", "at": "700 K", "heat of reaction": "-98.7 kJ/mol"}, "lies 30"),
        (
            {"is": "286.2 atm^-0.5", "at": "700 K", "heat of reaction": "98.7 kJ/mol"},
            "98.7 kJ/mol where the species",
        ),
        ({"is": "286.2 atm^-0.5", "at": "700 K", "heat of reaction": "-92.0 kJ/mol"}, "-92.0 kJ/mol where"),
        ({"exp of": {"a": "-11.24", "b": "11830 K"}, "in": "atm^-0.5"}, ""),
        (
            {"exp of": {"a": "-11.24", "b": "-11830 K"}, "in": "atm^-0.5"},
            "% below that of the Gibbs energies",
        ),
    ],
)
def test_an_equilibrium_constant_is_held_against_the_gibbs_energies(K: Tree, words: str) -> None:
    law = {**PLAIN, "backward": {"equilibrium constant": K}, "valid": {"temperature": "420 degC to 440 degC"}}
    if not words:
        assert not programme(case(law)).rate().failure
        return
    (found,) = problems(case(law))
    assert words in found.message and "allowed are 10 % and 5 kJ/mol" in found.message
    assert "may differ from Gibbs by" in found.hint


def test_a_stated_difference_is_allowed_and_shown() -> None:
    K = {"is": "200 atm^-0.5", "at": "700 K", "heat of reaction": "-92.0 kJ/mol"}
    stated = {"equilibrium constant": K, "may differ from Gibbs by": "40 %", "heat may differ by": "8 kJ/mol"}
    row = programme(case({**PLAIN, "backward": stated})).understanding().reactions[0]
    agreement = row.law.agreement
    assert agreement is not None
    assert agreement.heat.own == pytest.approx(-92e3) and -99.5e3 < agreement.heat.gibbs < -97e3
    assert -0.4 < agreement.off < -0.25


def test_a_constant_of_concentrations() -> None:
    """Closed form: K_c = K_p (R T)^(1/2) for half a mole less."""
    T = 700.0
    K = {"is": f"{286.2 / 101_325**0.5 * (8.31446261815324 * T) ** 0.5!r} (mol/m^3)^-0.5", "at": "700 K",
         "heat of reaction": "-95.8 kJ/mol"}  # fmt: skip
    law = {**PLAIN, "backward": {"equilibrium constant": K}}
    chemistry = programme(case(law)).model.chemistry
    found = exp(ln_K_of_laws(chemistry.laws, chemistry.table, T)[0])
    assert found == pytest.approx(286.2 / 1.01325**0.5, rel=1e-9)


# 1,000 times too much catalyst: what leaves is at rest by the law's own K.
@pytest.mark.parametrize("name", LAWS)
def test_a_long_bed_ends_where_Q_is_the_law_s_own_K(name: str) -> None:
    species, reactions, composition = LAWS[name]
    T, p = (
        ("500 K", "60 bar(a)")
        if name == "methanol"
        else ("700 K", "100 bar(a)" if "Temkin" in name else "1.3 bar(a)")
    )
    feed = {"flow": "100 kmol/h", "temperature": T, "composition": composition}
    catalyst = "20000 m^3" if "Temkin" in name else "20000 t"
    train = programme(one_bed(species, reactions, feed, catalyst, p))
    rating = train.rate()
    assert not rating.failure, rating.failure
    chemistry, along = train.model.chemistry, rating.profiles[0]
    off = ln_Q(chemistry.laws.nu, along.F[-1], along.p[-1]) - ln_K_of_laws(
        chemistry.laws, chemistry.table, along.T[-1]
    )
    assert np.abs(off).max() < 1e-6


def test_an_activity_by_reaction_is_a_smaller_constant() -> None:
    """Closed form: activity 0.25 of one reaction and 0.5 of the others is constants of 5 and half."""
    species, reactions, composition = LAWS["methanol"]
    feed = {"flow": "100 kmol/h", "temperature": "500 K", "composition": composition}
    tree = one_bed(species, reactions, feed, "300 kg", "60 bar(a)")
    listed = changed(
        tree, "train", 1, "bed 1", "catalyst activity", to={"every reaction": 0.5, "from CO2": 0.25}
    )
    found = programme(listed)
    smaller = deepcopy(tree)
    for name, share in (("from CO2", 0.25), ("reverse shift", 0.5)):
        form = smaller["reactions"][name]["constant"]["exp of"]
        form["a"] = repr(float(form["a"]) + float(np.log(share)))
    expected = programme(smaller).rate()
    rating = found.rate()
    for name in ("bed 1.exit temperature", "bed 1.exit flow of CH3OH", "bed 1.exit flow of CO"):
        assert rating.number(name) == pytest.approx(expected.number(name), rel=1e-8)
    assert found.model.catalogue.find("bed 1.catalyst activity of from CO2").kind == "number"


@pytest.mark.parametrize(
    ("points", "share"),
    [
        ([(0.0, 0.0), (1.0, 0.0)], 0.0),
        ([(0.3, 0.0), (0.3000001, 1.0)], 0.7),
        ([(0.0, 0.2), (0.3, 1.0)], 0.6 * 0.3 + 0.7),
        ([(0.2, 1.0), (0.6, 0.5), (0.9, 2.0)], 0.2 + 0.75 * 0.4 + 1.25 * 0.3 + 2.0 * 0.1),
    ],
)
def test_an_activity_along_depth_is_less_catalyst(points: list[tuple[float, float]], share: float) -> None:
    """Without pressure drop only the integral of the activity counts: closed form of straight lines."""
    depth = [{"at": at, "is": value} for at, value in points]
    found = programme(changed(case(PLAIN), "train", 1, "bed 1", "activity along depth", to=depth)).rate()
    expected = programme(case(PLAIN, catalyst=f"{2.0 * share!r} t")).rate()
    for name in ("bed 1.exit temperature", "bed 1.exit flow of SO3"):
        assert found.number(name) == pytest.approx(expected.number(name), rel=3e-7)


ADSORPTION = {"exp of": {"a": "-9.9", "b": "8619 K", "d": "1e-4 1/K"}, "in": "1/atm"}
FULL = {
    **EKLUND,
    "slowed by": [{"power": 1.5, "terms": [1, {"constant": ADSORPTION, "orders": {"SO2": 1}}]}],
    "effectiveness": {"Thiele": PARTICLE},
}


@pytest.mark.parametrize("law", [FULL, {**FULL, "effectiveness": 0.4, "backward": "from Gibbs energies"}])
def test_derivatives_by_parameters_of_every_form(law: Tree) -> None:
    """Against central differences of the chemistry shifted, on the same steps."""
    tree = changed(
        case(law, catalyst="30 t"), "train", 1, "bed 1", "catalyst activity", to={"oxidation": 0.8}
    )
    depth = [{"at": 0, "is": 0.3}, {"at": 0.4, "is": 1}]
    train = programme(changed(tree, "train", 1, "bed 1", "activity along depth", to=depth))
    wanted = ["bed 1.exit temperature", "bed 1.exit flow of SO3"]
    found = sensitivities(train, quantities=wanted, tolerance=1e-9)
    for column, name in enumerate(found.parameters):
        if name.startswith(("reaction ", "species ")) or "catalyst activity" in name:
            expected = _central(train, name, wanted)
            scale = np.maximum(np.abs(expected), 1e-6 * np.abs(found.values))
            assert np.abs(found.derivatives[:, column] - expected).max() < 1e-4 * scale.max(), name


SHIFTS = {-1: 1e-4, 0: 1e-4, 1: 1.0, 2: 1e-4, 3: 1.0, 4: 0.1, 5: 1e-4}
"""Half width of the central difference by kind of parameter, SI."""


def _central(train: TrainProgramme, name: str, wanted: list[str]) -> np.ndarray:
    one = next(parameter for parameter in parameters_of(train.model) if parameter.name == name)
    step = SHIFTS[one.kind]
    ends = [_moved(train, one, sign * step, wanted) for sign in (-1.0, 1.0)]
    return (ends[1] - ends[0]) / (2.0 * step)


def _moved(train: TrainProgramme, one: Parameter, by: float, wanted: list[str]) -> np.ndarray:
    model, v = train.model, train.model.inputs.all_numbers(train.now)
    if one.kind < 0:
        v = v + by * np.eye(len(v))[one.index]
    else:
        model = compile_model(model.case, shifted(model.chemistry, {one: by}))
    u, _ = model.inputs.of_numbers(v)
    outcome = model.passing.adaptive(u, np.zeros((len(u), 0)), 1e-10)
    base = model.base(outcome.out, u, np.zeros((len(u), 0)), train.now, model.catalogue.found)
    return FormRows.of({name: model.catalogue.find(name) for name in wanted}).of_base(base)[:, 0]


def test_isomers_in_a_case() -> None:
    """Closed form: K to the lump is the sum of the K to each isomer."""
    names = ["C4H8,1-butene", "C4H8,isobutene", "C4H8,cis2-buten"]
    reaction = {
        "equation": "2 ethylene <=> butenes",
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "constant": "1e-6 mol/(kg s bar^2)",
    }
    feed = {"flow": "100 kmol/h", "temperature": "500 K", "composition": {"ethylene": "100 %"}}
    lump = {"ethylene": {"gas data": "C2H4"}, "butenes": {"isomers": names}}
    K = [_K(one_bed(lump, {"one": reaction}, feed, "1 t"))]
    for name in names:
        single = {**lump, "butenes": {"gas data": name}}
        K.append(_K(one_bed(single, {"one": reaction}, feed, "1 t")))
    assert K[0] == pytest.approx(sum(K[1:]), rel=1e-4)


def _K(tree: Tree) -> float:
    chemistry = programme(tree).model.chemistry
    return exp(ln_K_of_laws(chemistry.laws, chemistry.table, 500.0)[0])


def test_isomers_of_different_formulas_are_refused() -> None:
    lump = {"a": {"isomers": ["C2H4", "C2H6"]}, "b": {"gas data": "H2"}}
    tree = one_bed(
        lump,
        {"one": {**PLAIN, "equation": "a => b", "orders": "as written"}},
        {**FEED, "composition": {"b": "100 %"}},
        "1 t",
    )
    (found,) = problems(tree)
    assert found.message == "a 2 is no isomer of a 1: their formulas differ"


@pytest.mark.parametrize(("name", "p", "little"), [("Collina", 1.3, "50 kg"), ("Temkin", 150.0, "0.02 m^3")])
def test_the_approach_to_equilibrium_is_that_of_the_law(name: str, p: float, little: str) -> None:
    """At rest by its own K a law has an approach of 0 K, with the derivatives of a central difference."""
    species, reactions, composition = LAWS[name]
    reaction = next(iter(reactions))
    feed = {
        "flow": "100 kmol/h",
        "temperature": {"now": "700 K", "from": "690 K", "to": "710 K"},
        "composition": composition,
    }
    approach = f"bed 1.approach to equilibrium of {reaction}"
    limits = {"near": {"of": approach, "at least": "0 K"}}
    for amount, left in (("2000 m^3" if "m^3" in little else "2000 t", 1e-4), (little, None)):
        train = programme(one_bed(species, reactions, feed, amount, f"{p} bar(a)", limits=limits))
        found = train.rate().number(approach)
        assert found is not None and (abs(found) < left if left else found > 1.0)
        x = train.now
        ends = [train.rate(x + step).number(approach) for step in (-0.05, 0.05)]
        slope = train.evaluate(x, train.start_mesh(x)[1]).margin_dx[0]
        assert slope[0] == pytest.approx((ends[1] - ends[0]) / 0.1, rel=2e-3, abs=2e-3)  # type: ignore[operator]
