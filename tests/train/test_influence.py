"""What moves the answer, against re-solving the case with the parameter moved; and the panel of a case."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from pathlib import Path

import numpy as np
import pytest

import reactorstage
from reactorstage.case.model import Case
from reactorstage.errors import CaseProblems
from reactorstage.face import Optimisation
from reactorstage.optimiser.polish import polished
from reactorstage.train.influence import Influence
from reactorstage.train.parameters import pick, shifted
from reactorstage.train.programme import TrainProgramme

CASES = Path(__file__).parents[2] / "cases"
LEAD = CASES / "selkemouth-ethylation.yaml"
RATE, HEAT = "reaction ethylation.ln rate constant", "species benzene.enthalpy of formation"
Made = Callable[[float], TrainProgramme]


@cache
def solved() -> Optimisation:
    return reactorstage.optimise(reactorstage.load(LEAD), starts=6, explain=False)


@cache
def changes() -> dict[str, Influence]:
    from reactorstage.train.influence import influences

    best = solved().optimum.best
    return {one.name: one for one in influences(solved().programme, best.x, best.multipliers)}


def best_cost(programme: TrainProgramme) -> float:
    """The optimum of a slightly changed programme, sharpened from the known answer."""
    from reactorstage.optimiser.solve import descend

    ending = descend(programme, solved().optimum.best.x, 0.05)
    assert ending.x is not None and ending.feasible
    answer = polished(programme, ending.x, 0.05)
    assert answer is not None
    return answer.cost


def slope(made: Made, step: float) -> float:
    return (best_cost(made(step)) - best_cost(made(-step))) / (2.0 * step)


def with_value(name: str, value: float, unit: str) -> Made:
    def made(by: float) -> TrainProgramme:
        return reactorstage.compile(reactorstage.load(LEAD, [f"{name}={value + by!r} {unit}".strip()]))

    return made


def with_shift(name: str) -> Made:
    def made(by: float) -> TrainProgramme:
        programme = solved().programme
        (one,) = pick(programme.model, [name])
        return programme.with_chemistry(shifted(programme.model.chemistry, {one: by}))

    return made


@pytest.mark.parametrize(
    ("name", "made", "step", "per_si"),
    [
        ("feed benzene.flow", with_value("feed benzene.flow", 965.0, "kmol/h"), 0.5, 3.6),
        ("feed benzene.temperature", with_value("feed benzene.temperature", 250.0, "degC"), 0.5, 1.0),
        ("bed 4.catalyst", with_value("bed 4.catalyst", 4.3, "t"), 0.005, 1e-3),
        ("bed 2.catalyst activity", with_value("bed 2.catalyst activity", 1.0, ""), 0.002, 1.0),
        ("price by-product", with_value("price by-product.costs", 62.0, "EUR/kmol"), 0.1, 62.0),
        ("price of level steam 28 bar", with_value("level steam 28 bar.earns", 19.0, "EUR/MWh"), 0.1, 19.0),
        (RATE, with_shift(RATE), 1e-3, 1.0),
        (HEAT, with_shift(HEAT), 20.0, 1.0),
        ("limit slip, effluent", with_value("limit slip.at most", 1.35, "kmol/h"), 0.002, 3.6),
    ],
)  # fmt: skip
def test_influences_are_slopes_of_re_solved_cases(name: str, made: Made, step: float, per_si: float) -> None:
    """Central differences of the optimal cost; per_si brings them to the unit of the parameter."""
    expected = slope(made, step) * per_si
    assert changes()[name].slope == pytest.approx(expected, rel=5e-3, abs=1e-12)


def test_influences_are_ranked_and_leave_free_numbers_out() -> None:
    found = list(changes().values())
    assert [abs(one.change) for one in found] == sorted((abs(one.change) for one in found), reverse=True)
    free = {number.name for number in solved().programme.numbers}
    assert not free & set(changes())
    assert "feed benzene.mole fraction of benzene" not in changes()
    assert "feed ethylene.mole fraction of ethane" in changes()
    assert all(one.change == pytest.approx(one.slope * one.step) or one.relative for one in found)


def without_panel() -> str:
    return LEAD.read_text(encoding="utf-8").partition("\npanel:")[0] + "\n"


def written(tmp_path: Path, panel: str) -> Case:
    path = tmp_path / "plant.yaml"
    path.write_text(without_panel() + f"\npanel:\n{panel}", encoding="utf-8")
    return reactorstage.load(path)


def test_steps_come_from_the_panel_by_name_before_every_bed_before_kind(tmp_path: Path) -> None:
    case = written(
        tmp_path,
        "  steps: {bed 1.inlet temperature: 0.2 K, every bed.inlet temperature: 2 K, temperature: 5 K}\n"
        "  least gain: 2 EUR/h\n  flat within: 0.5 %\n",
    )
    programme = reactorstage.compile(case)
    steps = {n.name: step for n, step in zip(programme.numbers, programme.panel.steps, strict=True)}
    assert steps["bed 1.inlet temperature"] == pytest.approx(0.2)
    assert steps["bed 4.inlet temperature"] == pytest.approx(2.0)
    assert steps["bed 1.injected ethylene"] == pytest.approx(0.5 / 3.6)
    assert programme.panel.least_gain(1.0) == pytest.approx(2.0 / 3600.0)
    assert programme.panel.band(100.0) == pytest.approx(0.5)


def test_without_a_panel_steps_follow_kind_and_range_and_catalyst_is_not_set() -> None:
    programme = reactorstage.compile(reactorstage.load(CASES / "quernthwaite-butadiene.yaml"))
    steps = {n.name: step for n, step in zip(programme.numbers, programme.panel.steps, strict=True)}
    assert steps["feed hydrogen.flow"] == pytest.approx(0.1 / 3.6)  # 0.5 would be a tenth of its range
    assert steps["bed 1.share of hydrogen"] == pytest.approx(0.01)
    assert steps["bed 2.catalyst"] == 0.0
    origins = dict(zip((n.name for n in programme.numbers), programme.panel.origins, strict=True))
    assert origins["bed 1.inlet temperature"] == pytest.approx(273.15)


@pytest.mark.parametrize(
    ("panel", "expected"),
    [
        ("  steps: {bed 9.inlet temperature: 1 K}\n", "is neither a free number nor a kind of quantity"),
        ("  steps: {temperature: 1 kmol/h}\n", "wrong unit"),
        ("  steps: {temperature: 0 K}\n", "above zero"),
        ("  steps: {temperature: 1 degC}\n", "difference of temperatures"),
        ("  least gain: 1 kmol/h\n", "wrong unit"),
        ("  flat within: cheap\n", "is not a number"),
        ("  stepping: 1 K\n", "stepping"),
    ],
)
def test_a_wrong_panel_is_shown_with_its_place(tmp_path: Path, panel: str, expected: str) -> None:
    with pytest.raises(CaseProblems) as caught:
        reactorstage.compile(written(tmp_path, panel))
    (problem,) = caught.value.problems
    assert expected in str(problem)
    assert problem.line == len(without_panel().splitlines()) + 3


def test_turnover_is_the_sum_of_absolute_money_terms() -> None:
    outcome = solved()
    assert outcome.best is not None
    money = outcome.best.money
    expected = sum(abs(money[label]) for label in money if label not in ("total", "heat"))
    assert outcome.programme.turnover(outcome.best.x) == pytest.approx(expected)
    assert expected > money["total"] and np.isfinite(expected)
