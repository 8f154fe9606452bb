"""The hottest place and the light-off depths inside a bed, with their derivatives.

Independent program: SciPy at 1e-12 with Cantera's properties, on a bed where a fast exothermic reaction is
followed by a slower endothermic one, so that it is hottest inside.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

from tests.bed.build import one_bed, programme
from tests.bed.outside import OutsideBed, Reaction

NAMES = ("benzene", "ethylene", "ethylbenzene", "styrene", "hydrogen")
FLOW, T_IN, P_IN, W = 300.0, 720.0, 20e5, 4000.0
SHARES = (0.90, 0.09, 0.01, 0.0, 0.0)
KINETICS = (
    Reaction({"benzene": 1, "ethylene": 1}, {"ethylbenzene": 1}, 5e-14, 50e3),
    Reaction({"ethylbenzene": 1}, {"styrene": 1, "hydrogen": 1}, 1e-9, 90e3, reversible=False),
)
WANTED = {"peak temperature": "0 K", **{f"depth at {share} % of rise": "0 %" for share in (10, 50, 90)}}
SPANS = {"bed 1.catalyst": W, "feed fresh.temperature": 40.0, "feed fresh.flow": FLOW}


@dataclass
class Inside:
    """Peak temperature, its depth, and depths at 10, 50 and 90 % of the rise."""

    peak: float
    depth: float
    shares: tuple[float, ...]


@cache
def expected(W: float = W, T: float = T_IN, flow: float = FLOW) -> Inside:
    """From SciPy's dense solution."""
    run = OutsideBed(NAMES, KINETICS).run(flow * np.array(SHARES), T, P_IN, W)
    profile = run.sol
    grid = np.linspace(0.0, W, 2001)
    middle = grid[int(np.argmax(profile(grid)[-2]))]
    near = (max(0.0, middle - W / 500), min(W, middle + W / 500))
    top = minimize_scalar(
        lambda w: -profile(w)[-2], bounds=near, method="bounded", options={"xatol": 1e-9 * W}
    )
    targets = [T + share * (run.y[-2, -1] - T) for share in (0.1, 0.5, 0.9)]
    depths = tuple(brentq(lambda w, t=t: profile(w)[-2] - t, 0.0, top.x, xtol=1e-13) / W for t in targets)
    return Inside(-top.fun, top.x / W, depths)


def inside_bed(wanted: dict[str, str] = WANTED):
    """The programme's evaluation of the same bed on fine steps: values and derivatives per span."""
    species = {
        "benzene": {"gas data": "C6H6"},
        "ethylene": {"gas data": "C2H4"},
        "ethylbenzene": {"gas data": "C8H10,ethylbenz"},
        "styrene": {"gas data": "C8H8,styrene"},
        "hydrogen": {"gas data": "H2"},
    }
    per = {"rate per": "catalyst mass", "driven by": "partial pressure"}
    reactions = {
        "ethylation": {
            "equation": "benzene + ethylene <=> ethylbenzene",
            "constant": {"at": "673.15 K", "is": "5e-14 mol/(kg s Pa^2)", "activation energy": "50 kJ/mol"},
            **per,
        },
        "dehydrogenation": {
            "equation": "ethylbenzene => styrene + hydrogen",
            "constant": {"at": "673.15 K", "is": "1e-9 mol/(kg s Pa)", "activation energy": "90 kJ/mol"},
            **per,
        },
    }
    feed = {
        "flow": {"now": f"{FLOW} mol/s", "from": "200 mol/s", "to": "400 mol/s"},
        "temperature": {"now": f"{T_IN} K", "from": "700 K", "to": "740 K"},
        "composition": {"benzene": "rest", "ethylene": "9 %", "ethylbenzene": "1 %"},
    }
    tree = one_bed(species, reactions, feed, f"{W} kg", "20 bar(a)")
    tree["train"][1]["bed 1"]["catalyst"] = {"now": f"{W} kg", "from": "2000 kg", "to": "6000 kg"}
    tree["limits"] = {name: {"of": f"bed 1.{name}", "at least": zero} for name, zero in wanted.items()}
    train = programme(tree)
    x = np.array([number.now for number in train.numbers])
    mesh = train.model.passing.adaptive(*train.model.inputs.values(x), 1e-9, most=20_000).stages
    return train, train.evaluate(x, mesh)


def test_hottest_place_and_depths_are_those_of_a_dense_integration() -> None:
    train, found = inside_bed()
    rating = train.rate()
    right = expected()
    assert 0.02 < right.depth < 0.9
    assert right.peak > rating.number("bed 1.exit temperature") + 2.0
    values = [right.peak, *right.shares]
    assert found.margin[:4] == pytest.approx(values, rel=1e-8)
    assert rating.number("bed 1.peak temperature") == pytest.approx(right.peak, abs=1e-5)
    assert rating.number("bed 1.depth of the peak") == pytest.approx(right.depth, rel=2e-3)
    for share, depth in zip((10, 50, 90), right.shares, strict=True):
        assert rating.number(f"bed 1.depth at {share} % of rise") == pytest.approx(depth, abs=1e-6)


def test_derivatives_of_the_hottest_place_and_depths_are_those_of_a_dense_integration() -> None:
    train, found = inside_bed()
    names = [number.name for number in train.numbers]
    for name, key in (("bed 1.catalyst", "W"), ("feed fresh.temperature", "T"), ("feed fresh.flow", "flow")):
        now = {"W": W, "T": T_IN, "flow": FLOW}[key]
        step = 2e-3 * SPANS[name]
        high, low = expected(**{key: now + step}), expected(**{key: now - step})
        slopes = np.array([high.peak - low.peak, *np.subtract(high.shares, low.shares)]) / (2.0 * step)
        ours = found.margin_dx[:4, names.index(name)]
        assert SPANS[name] * ours == pytest.approx(SPANS[name] * slopes, rel=1e-4, abs=1e-4), name
