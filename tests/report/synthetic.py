"""Made-up ratings and optima for the tests of tables, files and figures: round shapes, no chemistry.

The lead numbers are those of an invented four-bed case; profiles are smooth curves through them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from itertools import pairwise
from types import SimpleNamespace
from typing import Any

import numpy as np

from reactorstage.optimiser import result as optimise_result
from reactorstage.optimiser.programme import FreeNumber, LimitRow
from reactorstage.train.result import HeatSale, LimitState, Profile, Rating, StepState, Value

KELVIN = 273.15
FLOW = 1e3 / 3600.0
HOUR = 3600.0


@dataclass(frozen=True)
class Bed:
    """One bed in display units; lit is the depth (part) at 90 % of its rise."""

    catalyst: float
    injected: float
    inlet: float
    exit: float
    ratio: float | None
    lit: float
    approach: float
    made: float
    drop: float
    removed: float
    was_injected: float = 67.0


LEAD = (
    Bed(2.6, 77.0, 364.0, 410.0, 12.55, 0.65, 116.0, 1.46, 0.27, 1.750),
    Bed(3.0, 74.9, 364.0, 408.5, 11.60, 0.62, 74.0, 4.20, 0.33, 1.787),
    Bed(3.4, 69.1, 364.0, 403.6, 11.60, 0.62, 61.0, 6.18, 0.39, 0.0),
    Bed(4.3, 47.0, 397.9, 424.0, 15.55, 0.33, 8.0, 5.45, 0.52, 10.922),
)
TODAY = (
    Bed(2.6, 67.0, 384.0, 424.3, 14.40, 0.40, 95.0, 2.20, 0.28, 1.517),
    Bed(3.0, 67.0, 384.0, 423.4, 13.10, 0.40, 60.0, 4.70, 0.34, 1.529),
    Bed(3.4, 67.0, 384.0, 422.2, 12.20, 0.40, 40.0, 5.90, 0.40, 1.526),
    Bed(4.3, 67.0, 384.0, 421.0, 11.40, 0.40, 9.0, 5.11, 0.53, 10.752),
)


@dataclass(frozen=True)
class Names:
    """Who is who."""

    excess: str = "benzene"
    main: str = "ethylene"
    product: str = "ethylbenzene"
    by_product: str = "diethylbenzene"
    main_reaction: str = "ethylation"
    side_reaction: str = "second ethylation"


@dataclass(frozen=True)
class Options:
    """What a made-up rating carries."""

    names: Names = field(default_factory=Names)
    split: bool = True
    priced: bool = True
    excess_flow: float = 965.0
    furnace: float = -5.107
    total: float = 1319.7


def case(options: Options, number_of_beds: int) -> Any:
    """A stand-in with the few things that reports ask of a case."""
    steam = SimpleNamespace(
        heats_up_to=None, cools_down_to=450.0, costs=None, earns="19 EUR/MWh", capacity=None
    )
    air = SimpleNamespace(heats_up_to=None, cools_down_to=330.0, costs="4 EUR/MWh", earns=None, capacity=None)
    fire = SimpleNamespace(
        heats_up_to=753.0, cools_down_to=None, costs="34 EUR/MWh", earns=None, capacity=None
    )
    ladder = {"steam 9 bar": steam, "air": air, "fired heater": fire}
    levels = SimpleNamespace(levels=ladder, minimum_approach=15.0) if options.priced else None
    return SimpleNamespace(
        name="Selkemouth Works, four-bed ethylation"
        if number_of_beds == 4
        else f"Train of {number_of_beds} beds",
        currency="EUR",
        hash="0" * 64,
        heat_levels=levels,
        train=[SimpleNamespace(owner=f"bed {n + 1}", bed=True, steps=()) for n in range(number_of_beds)],
        feeds={"benzene": None, "ethylene": None},
        aim=SimpleNamespace(direction="least", quantity="money.total"),
        fluid=SimpleNamespace(density="ideal gas", phase=None),
    )


def rating(
    beds: Sequence[Bed] = LEAD, options: Options | None = None, x: Sequence[float] | None = None
) -> Rating:
    """A rating whose tables, profiles and limits agree with the given beds."""
    options = options or Options()
    profiles = _profiles(beds, options)
    limits = tuple(_limits(beds, options))
    broken = any(not state.met for state in limits)
    return Rating(
        case=case(options, len(beds)),
        status=optimise_result.BROKEN if broken else optimise_result.INSIDE,
        failure="",
        x=np.asarray(x if x is not None else user_numbers(beds)),
        quantities=_quantities(beds, options, profiles),
        profiles=profiles,
        steps=tuple(_steps(beds, options)),
        limits=limits,
        money=_money(beds, options),
        heat=_heat(beds) if options.priced else (),
        species=_species(options.names),
        reactions=(options.names.main_reaction, options.names.side_reaction),
        nu=np.array([[-1.0, -1.0, 0.0, 1.0, 0.0], [0.0, -1.0, 0.0, -1.0, 1.0]]),
        main_reactant=options.names.main,
        excess_reactant=options.names.excess,
        product=options.names.product,
        by_products=(options.names.by_product,) if options.names.by_product else (),
        unpriced=("effluent",) if options.priced else (),
        atoms=3e-16,
        energy=2e-13,
        notes=(),
        integration_steps=212,
        right_hand_sides=1480,
    )


def _species(names: Names) -> tuple[str, ...]:
    return (names.excess, names.main, "ethane", names.product, names.by_product or "nothing")


def user_numbers(beds: Sequence[Bed]) -> list[float]:
    """Free numbers in SI: injections of all beds but the last, then inlets."""
    return [bed.injected * FLOW for bed in beds[:-1]] + [bed.inlet + KELVIN for bed in beds]


def _profiles(beds: Sequence[Bed], options: Options) -> tuple[Profile, ...]:
    F = np.array([options.excess_flow, 0.0, 0.4, 0.0, 0.0]) * FLOW
    found = []
    for number, bed in enumerate(beds, 1):
        F = F + np.array([0.0, bed.injected, 0.0, 0.0, 0.0]) * FLOW
        depth = np.linspace(0.0, 1.0, 41)
        gone = np.tanh((depth / bed.lit) ** 2 * 1.47) / np.tanh((1.0 / bed.lit) ** 2 * 1.47)
        side = bed.made * FLOW * gone**1.5
        left = 0.05 * bed.injected * FLOW
        main = (F[1] - left - 2.0 * side[-1]) * gone + 0.0
        xi = np.column_stack([main + side, side])
        w = depth * bed.catalyst * 1e3
        profile_F = F + np.column_stack([-main - side, -main - 2 * side, 0 * main, main, side])
        T = bed.inlet + KELVIN + (bed.exit - bed.inlet) * gone
        r = np.gradient(xi, w, axis=0) if bed.catalyst else np.zeros((len(w), 2))
        p = np.linspace(19.4e5, 19.4e5 - bed.drop * 1e5, len(w))
        found.append(Profile(f"bed {number}", w, T, p, profile_F, r, float(T.max()), float(w[-1])))
        F = profile_F[-1]
    return tuple(found)


def _quantities(beds: Sequence[Bed], options: Options, profiles: Sequence[Profile]) -> dict[str, Value]:
    found: dict[str, Value] = {}
    names = options.names
    for bed, profile in zip(beds, profiles, strict=True):
        owner = profile.owner
        numbers = {
            "catalyst": (bed.catalyst * 1e3, "mass"),
            "catalyst activity": (1.0, "number"),
            "inlet temperature": (bed.inlet + KELVIN, "temperature"),
            "exit temperature": (bed.exit + KELVIN, "temperature"),
            "peak temperature": (profile.T_peak, "temperature"),
            "rise": (bed.exit - bed.inlet, "temperature difference"),
            "inlet pressure": (19.4e5, "pressure"),
            "pressure drop": (bed.drop * 1e5, "pressure difference"),
            f"inlet ratio {names.excess}/{names.main}": (bed.ratio, "ratio"),
            f"conversion of {names.main}": (0.95, "fraction"),
            "depth at 90 % of rise": (bed.lit, "fraction"),
            f"approach to equilibrium of {names.main_reaction}": (bed.approach, "temperature difference"),
            f"outside validity of {names.main_reaction}": (0.0, "fraction"),
        }
        flow = bed.injected * FLOW if bed.ratio else 0.0
        numbers[f"inlet flow of {names.main}"] = (flow, "molar flow")
        numbers[f"inlet flow of {names.excess}"] = ((bed.ratio or 0.0) * flow, "molar flow")
        if options.split:
            numbers[f"injected {names.main}"] = (bed.injected * FLOW, "molar flow")
        if names.by_product:
            numbers[f"made {names.by_product}"] = (bed.made * FLOW, "molar flow")
        numbers[f"made {names.product}"] = (bed.injected * 0.9 * FLOW, "molar flow")
        for word, (value, kind) in numbers.items():
            found[f"{owner}.{word}"] = Value(value, kind, "" if value is not None else f"no {names.main}")
    last = profiles[-1].F[-1]
    found |= {
        f"effluent.flow of {s}": Value(float(F), "molar flow")
        for s, F in zip(_species(names), last, strict=True)
    }
    found[f"train.made {names.product}"] = Value(231.6 * FLOW, "molar flow")
    found[f"train.made {names.main}"] = Value(-266.2 * FLOW, "molar flow")
    found["money.total"] = Value(_money(beds, options)["total"], "money rate")
    found["train.catalyst"] = Value(sum(bed.catalyst for bed in beds) * 1e3, "mass")
    for step in _steps(beds, options):
        if step.kind in ("heat", "cool"):
            found[f"{step.owner}.heat removed"] = Value(step.heat_removed, "power")
            found[f"{step.owner}.temperature after exchanger"] = Value(step.T_after, "temperature")
            found[f"{step.owner}.inlet temperature"] = Value(step.T_before, "temperature")
        if step.kind == "inject":
            found[f"{step.owner}.temperature after injection"] = Value(step.T_after, "temperature")
    return found


def _steps(beds: Sequence[Bed], options: Options) -> list[StepState]:
    first = beds[0].inlet + KELVIN
    found = [
        StepState(
            "entry", "take", options.names.excess, options.excess_flow * FLOW, 0.0, None, 250.0 + KELVIN
        ),
        StepState("entry", "heat", "fired heater", 0.0, options.furnace * 1e6, 250.0 + KELVIN, first + 9.4),
    ]
    if options.split:
        flow = beds[0].injected * FLOW
        found.append(StepState("entry", "inject", options.names.main, flow, 0.0, first + 9.4, first))
    for number, (bed, after) in enumerate(pairwise(beds), 1):
        place, hot, cold = f"gap {number}", bed.exit + KELVIN, after.inlet + KELVIN
        mixed = max(hot - 9.0, cold) if options.split else hot
        if options.split:
            flow = after.injected * FLOW
            found.append(StepState(place, "inject", options.names.main, flow, 0.0, hot, mixed))
        found.append(StepState(place, "cool", "every cooling level", 0.0, bed.removed * 1e6, mixed, cold))
    last = beds[-1].exit + KELVIN
    found.append(StepState("effluent", "cool", "air", 0.0, beds[-1].removed * 1e6, last, 190.0 + KELVIN))
    return found


def _limits(beds: Sequence[Bed], options: Options) -> list[LimitState]:
    names, found = options.names, []
    for number, bed in enumerate(beds, 1):
        owner = f"bed {number}"
        found += [
            _limit(
                "hot exit",
                owner,
                "exit temperature",
                "at most",
                "temperature",
                424.0 + KELVIN,
                bed.exit + KELVIN,
            ),
            _limit(
                "light-off",
                owner,
                "inlet temperature",
                "at least",
                "temperature",
                364.0 + KELVIN,
                bed.inlet + KELVIN,
            ),
            _limit(
                "coking",
                owner,
                f"inlet ratio {names.excess}/{names.main}",
                "at least",
                "ratio",
                11.6,
                bed.ratio,
            ),
            _limit("rise", owner, "rise", "at most", "temperature difference", 46.0, bed.exit - bed.inlet),
        ]
    for number, bed in enumerate(beds[:-1], 1):
        removed = bed.removed * 1e6
        found += [
            _limit("cooler", f"gap {number}", "heat removed", "at least", "power", 0.0, removed),
            _limit("cooler", f"gap {number}", "heat removed", "at most", "power", 2.0e6, removed),
        ]
    found.append(
        _limit("slip", "effluent", f"flow of {names.main}", "at most", "molar flow", 1.35 * FLOW, 1.10 * FLOW)
    )
    return found


def _limit(
    label: str, owner: str, word: str, direction: str, kind: str, bound: float, value: float | None
) -> LimitState:
    margin = None if value is None else (bound - value if direction == "at most" else value - bound)
    scale = abs(bound) or 1e6
    met = margin is None or margin > -1e-6 * scale
    return LimitState(
        label,
        owner,
        f"{owner}.{word}",
        direction,
        kind,
        bound,
        0.0,
        value,
        margin,
        met,
        margin is not None and abs(margin) <= 1e-6 * scale,
        False,
        False,
        f"reason for {label}",
        "" if value is not None else "no ethylene",
    )


def _money(beds: Sequence[Bed], options: Options) -> dict[str, float]:
    if not options.priced:
        return {"total": 0.0}
    gaps = {f"heat of gap {n}": 21.0 * bed.removed / HOUR for n, bed in enumerate(beds[:-1], 1)}
    furnace = -options.furnace * 34.0 / HOUR
    by_product = 62.0 * sum(bed.made for bed in beds) / HOUR
    return {
        "by-product": by_product,
        "heat of entry": furnace,
        **gaps,
        "heat": furnace + sum(gaps.values()),
        "soft limits": 0.0,
        "total": options.total / HOUR,
    }


def _heat(beds: Sequence[Bed]) -> tuple[HeatSale, ...]:
    gaps = [
        HeatSale(f"gap {n}", "steam 9 bar", bed.removed * 1e6, 21.0 * bed.removed / HOUR, False)
        for n, bed in enumerate(beds[:-1], 1)
    ]
    return (HeatSale("entry", "fired heater", 5.107e6, 173.6 / HOUR, True), *gaps)


def numbers(beds: Sequence[Bed]) -> tuple[FreeNumber, ...]:
    """The free numbers that belong to `user_numbers`."""
    now = user_numbers(beds)
    split = [
        FreeNumber(f"bed {n}.injected ethylene", now[n - 1], 0.0, 268.0 * FLOW, "molar flow", "split")
        for n in range(1, len(beds))
    ]
    inlets = [
        FreeNumber(
            f"bed {n}.inlet temperature",
            now[len(beds) + n - 2],
            350.0 + KELVIN,
            410.0 + KELVIN,
            "temperature",
            "inlet temperature",
            bed=n,
        )
        for n in range(1, len(beds) + 1)
    ]
    return (*split, *inlets)


def programme(of: Rating, beds: Sequence[Bed] = TODAY) -> Any:
    """What reports ask of a compiled train: its numbers and limits, in the order of the rating."""
    rows = tuple(
        LimitRow(s.label, s.owner, s.quantity, s.direction, s.bound, s.keep_away, s.kind, 1.0, 1.0)
        for s in of.limits
    )
    return SimpleNamespace(numbers=numbers(beds), limits=rows, splits=())


def optimisation(others: int = 1, status: str = optimise_result.INSIDE) -> Any:
    """A made-up outcome of the lead case with one other answer."""
    today = rating(TODAY, Options(total=1409.3, furnace=-5.971))
    best = rating(LEAD)
    second_beds = (*LEAD[:2], replace(LEAD[2], removed=1.52), replace(LEAD[3], inlet=364.0, exit=404.0))
    second = rating(second_beds, Options(total=1338.1))
    held = tuple(i for i, state in enumerate(best.limits) if state.at_work)
    answer = optimise_result.Answer(
        best.x, 1319.7 / HOUR, 0.0, 1e-9, held, np.zeros(len(best.limits)), (), np.zeros(len(best.limits)), 15
    )
    other = replace(answer, x=second.x, cost=1338.1 / HOUR, starts=9)
    starts = tuple(
        optimise_result.StartRecord(f"random {n}", "converged", 1319.7 / HOUR, n % 2, 14, 30)
        for n in range(24)
    )
    optimum = optimise_result.Optimum(
        status,
        (answer, *([other] * others)),
        starts,
        _worths(best),
        _equal_splits(best),
        None,
        None,
        1e-7,
        720,
    )
    return SimpleNamespace(
        case=best.case,
        programme=programme(best),
        optimum=optimum,
        today=today,
        best=best,
        others=(second,) * others,
        seconds=1.1,
        seed=1,
        influences=(),
    )


def _worths(best: Rating) -> tuple[optimise_result.Worth, ...]:
    def rows(label: str, owners: Sequence[str]) -> tuple[int, ...]:
        return tuple(i for i, s in enumerate(best.limits) if s.label == label and s.owner in owners)

    worth = optimise_result.Worth
    beds13, beds23 = ("bed 1", "bed 2", "bed 3"), ("bed 2", "bed 3")
    return (
        worth(
            "hot exit", ("bed 4",), rows("hot exit", ["bed 4"]), 1.0, "temperature", 2.2 / HOUR, 2.8 / HOUR
        ),
        worth("light-off", beds13, rows("light-off", beds13), 1.0, "temperature", 3.9 / HOUR, 4.5 / HOUR),
        worth("coking", beds23, rows("coking", beds23), 0.1, "ratio", 0.4 / HOUR, 0.5 / HOUR),
        worth(
            "rise",
            ("bed 1",),
            rows("rise", ["bed 1"]),
            1.0,
            "temperature difference",
            0.0,
            None,
            "tightening leaves nothing",
        ),
    )


def _equal_splits(best: Rating) -> tuple[optimise_result.EqualSplit, ...]:
    ratio = next(i for i, s in enumerate(best.limits) if s.label == "coking" and s.owner == "bed 4")
    return (optimise_result.EqualSplit("ethylene", 7.9 / HOUR, 1327.6 / HOUR, None, ((ratio, 0.3),)),)
