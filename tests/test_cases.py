"""Every shipped case is checked, rated and optimised; what it claims to show is there."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pytest

import reactorstage
from reactorstage.face import Optimisation

FOLDER = Path(__file__).parent.parent / "cases"
CASES = sorted(path.name for path in FOLDER.glob("*.yaml"))
LEAD = "selkemouth-ethylation.yaml"
KELVIN = 273.15
PER_HOUR = 3600.0
KMOL_PER_H = 3.6


SUMS = ("total", "heat")
"""Money terms that are sums of others."""

OPERATING = ("turndown", "dilute-ethylene", "cooler-out", "bed-2-out")
"""Variants of the lead case."""

EXPLAINED = ("selkemouth-ethylation.yaml",)
"""Cases of which more is claimed than the best answer: searched from many starts and explained."""


@cache
def solved(name: str) -> Optimisation:
    """Only few are explained and searched from many starts; ethylation in mid-run needs them to be found."""
    explain = name in EXPLAINED
    case = reactorstage.load(FOLDER / name)
    starts = 20 if explain or name.startswith("selkemouth-xyl") else 5
    return reactorstage.optimise(case, starts=starts, seed=1, explain=explain)


@pytest.mark.parametrize("name", CASES)
def test_case_is_understood_without_warnings_about_itself(name: str) -> None:
    understood = reactorstage.compile(reactorstage.load(FOLDER / name)).understanding()
    assert all(row.imbalance <= 1e-9 for row in understood.reactions)
    assert not [text for text in understood.warnings if "carries no price" not in text]


@pytest.mark.parametrize("name", CASES)
def test_case_closes_and_meets_its_limits_at_the_optimum(name: str) -> None:
    outcome = solved(name)
    assert outcome.best is not None
    for rating in (outcome.today, outcome.best):
        assert rating.atoms <= 1e-12
        assert rating.energy <= 1e-9
        assert max(rating.closed.residuals.values(), default=0.0) <= 1e-9
    assert outcome.status == "inside all limits" == outcome.best.status
    assert outcome.today.status == "limits broken"
    assert outcome.optimum.discretisation_error is not None
    turnover = sum(abs(value) for label, value in outcome.best.money.items() if label not in SUMS)
    assert abs(outcome.optimum.discretisation_error) < 3e-6 * turnover


@pytest.mark.parametrize("name", CASES)
def test_every_start_ends_or_says_why(name: str) -> None:
    for record in solved(name).optimum.starts:
        assert record.answer >= 0 or record.ended


@pytest.mark.parametrize("name", CASES)
def test_work_of_a_local_optimum_is_bounded(name: str) -> None:
    """Frozen with half to spare; an evaluation with gradient takes 1 to 3 ms, the whole far below 0.3 s."""
    best = solved(name).optimum
    assert min(start.evaluations for start in best.starts if start.answer == 0) <= 60


def numbers(outcome: Optimisation, which: int) -> dict[str, float]:
    x = outcome.optimum.answers[which].x
    return {number.name: value for number, value in zip(outcome.programme.numbers, x, strict=True)}


def test_lead_case_has_a_cool_and_a_hot_answer() -> None:
    """Frozen: computed with the shipped data; the two basins were first found by an independent model."""
    outcome = solved("selkemouth-ethylation.yaml")
    cool, hot = outcome.optimum.answers[:2]
    assert cool.cost * PER_HOUR == pytest.approx(979.81, abs=0.02)
    assert hot.cost * PER_HOUR == pytest.approx(993.50, abs=0.02)
    assert numbers(outcome, 0)["bed 4.inlet temperature"] - KELVIN == pytest.approx(364.0, abs=0.01)
    assert numbers(outcome, 1)["bed 4.inlet temperature"] - KELVIN == pytest.approx(397.6, abs=0.1)


def test_lead_case_as_rated_is_near_an_independent_model() -> None:
    """Independent model with other thermochemical data: exits 424, 423, 422, 421 degC, 18.2 and 0.91 kmol/h.

    Ours are cooler by up to 0.6 K, the slip higher by 15 %: the slip is held by equilibrium, and 1 kJ/mol in
    the heats of formation moves K by about 20 % at 673 K (exp(1000/(R T)), closed form).
    """
    today = solved("selkemouth-ethylation.yaml").today
    for bed, exit_ in enumerate((424.0, 423.0, 422.0, 421.0), start=1):
        value = today.number(f"bed {bed}.exit temperature")
        assert value is not None
        assert value - KELVIN == pytest.approx(exit_, abs=1.0)
    assert today.number("effluent.flow of diethylbenzene") == pytest.approx(18.2 / KMOL_PER_H, rel=0.02)
    assert today.number("effluent.flow of ethylene") == pytest.approx(0.91 / KMOL_PER_H, rel=0.2)
    broken = [limit.label for limit in today.limits if not limit.met]
    assert broken == ["coking"]


def test_unpriced_effluent_shuts_the_last_cooler_and_lets_bed_4_run_hot() -> None:
    """Independent model: 76.9/74.9/69.1/47.2 kmol/h, inlets 364/364/364/398 degC; ours near each."""
    outcome = solved("selkemouth-effluent-unpriced.yaml")
    found = numbers(outcome, 0)
    for bed, flow in enumerate((76.9, 74.9, 69.1), start=1):
        assert found[f"bed {bed}.injected ethylene"] * KMOL_PER_H == pytest.approx(flow, abs=2.0)
    for bed, inlet in enumerate((364.0, 364.0, 364.0, 398.0), start=1):
        assert found[f"bed {bed}.inlet temperature"] - KELVIN == pytest.approx(inlet, abs=1.0)
    assert outcome.best is not None
    assert outcome.best.number("gap 3.heat removed") == pytest.approx(0.0, abs=1.0)
    assert outcome.best.unpriced == ("effluent",)


def test_equal_division_breaks_the_ratio_limit_of_bed_4_and_costs_a_few_percent() -> None:
    """An independent model put the penalty at 0.6 % with the ratio limit at 11.3; ours relaxes it to 11.4."""
    outcome = solved("selkemouth-ethylation.yaml")
    [equal] = outcome.optimum.equal_splits
    relaxed = [outcome.programme.limits[index].name for index, _ in equal.relaxed]
    assert relaxed == ["coking, bed 4"]
    assert equal.penalty is not None
    assert 0.0 < equal.penalty < 0.04 * abs(outcome.optimum.best.cost)


def test_operating_variants_hold_what_their_files_say() -> None:
    """Frozen: what holds each answer, as the opening of each file tells it."""
    held = {
        name: {(one.label, one.owner) for one in best.limits if one.at_work}
        for name in OPERATING
        if (best := solved(f"selkemouth-{name}.yaml").best) is not None
    }
    assert ("valve", "bed 4") in held["turndown"] and ("slip", "effluent") not in held["turndown"]
    assert {("valve", "bed 1"), ("valve", "bed 2")} <= held["dilute-ethylene"]
    assert ("valve", "bed 2") in held["cooler-out"]
    assert not [owner for _, owner in held["bed-2-out"] if owner == "bed 2"]
    out = solved("selkemouth-bed-2-out.yaml").best
    assert out is not None and out.number("bed 2.made ethylbenzene") == 0.0
