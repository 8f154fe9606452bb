"""One pass through the lead case by every route at equal accuracy, all in turn."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from itertools import cycle
from typing import Any

import numpy as np

from reactorstage import compile
from reactorstage.train.passing import SEARCH
from tests.benchmarks import casadi_route
from tests.benchmarks.accuracy import (
    TOLERANCES,
    Chosen,
    Yardstick,
    gradient_error,
    kernel_error,
    true_gradient,
)
from tests.benchmarks.cantera_route import FlowRoute, ParcelRoute, solution
from tests.benchmarks.kernel_route import KernelRoute
from tests.benchmarks.lead import Array, lead_case, lead_numbers
from tests.benchmarks.scipy_route import ScipyRoute
from tests.benchmarks.scipy_together import TogetherRoute
from tests.benchmarks.search import STEP
from tests.benchmarks.table import Row, ratio, timed
from tests.benchmarks.timing import interleaved

NO_PRESSURE_DROP = tuple(f"bed {b}.pressure drop factor=0" for b in range(1, 5))
ONE_BED = (*NO_PRESSURE_DROP, *(f"bed {b}.catalyst=0 t" for b in range(2, 5)))
DIFFERENCES = (1e-3, 1e-4, 1e-5, 1e-6)
NEAR = 0.02
"""Every pass is at another setting, this share of the ranges away from the one of the frozen mesh."""


class LeadRoutes:
    """The lead case with every route at equal accuracy."""

    def __init__(self) -> None:
        self.programme = compile(lead_case())
        self.numbers = lead_numbers(self.programme)
        self.kernel = KernelRoute(self.programme)
        self.yardstick = Yardstick.of(self.programme, self.numbers)
        self.error = kernel_error(self.programme, self.yardstick)
        self.scipy = self.yardstick.chosen(partial(ScipyRoute, self.numbers), self.error)
        self.together = TogetherRoute(self.numbers, self.scipy.tolerance)
        self.low = np.array([number.low for number in self.programme.numbers])
        self.span = np.array([number.high for number in self.programme.numbers]) - self.low

    def settings(self) -> list[Array]:
        """Settings near today's."""
        away = np.random.default_rng(1).uniform(-NEAR, NEAR, (16, len(self.span)))
        return [self.programme.now + self.span * one for one in away]

    def in_turn(self, function: Callable[[Array], object]) -> Callable[[], object]:
        """A task that takes the next setting at every call."""
        settings = cycle(self.settings())
        return lambda: function(next(settings))


def gradient_rows(lead: LeadRoutes, rounds: int) -> list[Row]:
    """Value and gradient: kernel, finite differences, forward sensitivities."""
    mesh, step = lead.kernel.mesh(lead.programme.now), STEP * lead.span
    tasks = {
        "both": lead.in_turn(lambda x: lead.kernel.value_and_gradient(x, mesh)),
        "value": lead.in_turn(lambda x: lead.kernel.frozen_value(x, mesh)),
        "adaptive": lead.in_turn(lead.programme.start_mesh),
        "scipy value": lead.in_turn(lead.scipy.route.value),
        "scipy both": lead.in_turn(lambda x: lead.scipy.route.value_and_gradient(x, step)),
        "together": lead.in_turn(lambda x: lead.together.value_and_gradient(x, step)),
    }
    exact, how = as_exact(lead)
    tasks["scipy exact"] = lead.in_turn(exact)
    symbolic = chosen_casadi(lead)
    if symbolic is not None:
        tasks |= {
            "casadi value": lead.in_turn(symbolic.route.value),
            "casadi both": lead.in_turn(symbolic.route.value_and_gradient),
        }
    said, found = gradient_errors(lead, symbolic), interleaved(tasks, rounds)
    rows = [
        timed("value and gradient, steps frozen", found["both"], at_most=1.0, note=said["both"]),
        timed("value, steps frozen", found["value"]),
        ratio("value and gradient over value", found["both"], found["value"], at_most=3.0),
        timed("value and gradient, steps by error control", found["adaptive"], note=accuracy_note(lead)),
        timed("SciPy LSODA, value", found["scipy value"], note=chosen_note(lead.scipy)),
        timed(
            "SciPy LSODA with forward differences, value and gradient",
            found["scipy both"],
            note=said["scipy both"],
        ),
        ratio("SciPy over the kernel, value and gradient", found["scipy both"], found["both"]),
        timed("SciPy LSODA, differences as exact as the kernel's gradient", found["scipy exact"], note=how),
        ratio("the same over the kernel", found["scipy exact"], found["both"], at_least=150.0),
        timed(
            "SciPy LSODA, all forward differences in one vectorised integration",
            found["together"],
            note=said["together"],
        ),
        ratio("the same over the kernel", found["together"], found["both"]),
    ]
    if symbolic is None:
        return [*rows, Row("CasADi with CVODES forward sensitivities", None, "ms", note="not installed")]
    return [
        *rows,
        timed("CasADi with CVODES, value", found["casadi value"], note=chosen_note(symbolic)),
        timed(
            "CasADi with CVODES forward sensitivities, value and gradient",
            found["casadi both"],
            note=said["casadi both"],
        ),
        ratio("CasADi over the kernel, value and gradient", found["casadi both"], found["both"]),
    ]


def rating_rows(lead: LeadRoutes, rounds: int) -> list[Row]:
    """A rating without gradient and without pressure drop: kernel and Cantera."""
    programme = compile(lead_case(*NO_PRESSURE_DROP))
    numbers, kernel = lead_numbers(programme), KernelRoute(programme)
    yardstick = Yardstick.of(programme, numbers)
    error = kernel_error(programme, yardstick)
    gas = solution(numbers, programme.model.chemistry)
    flow = yardstick.chosen(partial(FlowRoute, numbers, gas), error)
    parcel = yardstick.chosen(partial(ParcelRoute, numbers, gas), error)
    for x in lead.settings():
        parcel.route.value(x)
    inlet = numbers.benzene + numbers.injection(programme.now[0]), programme.now[3]
    found = interleaved(
        {
            "kernel": lead.in_turn(kernel.value),
            "flow": lead.in_turn(flow.route.value),
            "parcel": lead.in_turn(parcel.route.value),
            "kernel, one": partial(KernelRoute(compile(lead_case(*ONE_BED))).value, programme.now),
            "flow, one": partial(flow.route.bed, 0, *inlet),
            "parcel, one": partial(parcel.route.bed, 0, *inlet),
        },
        rounds,
    )
    return [
        timed("rating without gradient", found["kernel"], note="pressure drop off, as Cantera needs it"),
        timed("Cantera, plug-flow reactors", found["flow"], note=chosen_note(flow)),
        ratio("Cantera's plug-flow reactors over the kernel", found["flow"], found["kernel"], at_least=4.0),
        timed(
            "Cantera, parcels of gas with residence times known beforehand",
            found["parcel"],
            note=f"a bound, no rating; {chosen_note(parcel)}",
        ),
        ratio("Cantera's parcels over the kernel", found["parcel"], found["kernel"]),
        timed("one bed: rating without gradient", found["kernel, one"], note="limits and money included"),
        timed("one bed: Cantera, plug-flow reactor", found["flow, one"], note="the bed alone"),
        timed("one bed: Cantera, parcel", found["parcel, one"], note="the bed alone"),
    ]


def chosen_casadi(lead: LeadRoutes) -> Chosen[casadi_route.CasadiRoute] | None:
    if not casadi_route.INSTALLED:
        return None
    return lead.yardstick.chosen(partial(casadi_route.CasadiRoute, lead.numbers), lead.error)


def gradient_errors(lead: LeadRoutes, symbolic: Chosen[casadi_route.CasadiRoute] | None) -> dict[str, str]:
    """What to say of each gradient: its error at the first setting."""
    x, sizes = lead.yardstick.settings[0], lead.yardstick.sizes[0]
    found = {
        "both": lead.kernel.value_and_gradient(x, lead.kernel.mesh(x)),
        "scipy both": lead.scipy.route.value_and_gradient(x, STEP * lead.span),
        "together": lead.together.value_and_gradient(x, STEP * lead.span),
    }
    if symbolic is not None:
        found["casadi both"] = symbolic.route.value_and_gradient(x)
    truth = true_gradient(lead.numbers, x, lead.span)
    errors = {name: gradient_error(one, truth, lead.span, sizes) for name, (_, one) in found.items()}
    return {name: f"error of the gradient {error:.0e}" for name, error in errors.items()}


def as_exact(lead: LeadRoutes) -> tuple[Callable[[Array], object], str]:
    """The cheapest LSODA with differences whose gradient is as right as the kernel's, and how it does it.

    Forward differences first, then central ones; each with the loosest tolerance and the best of some steps.
    """
    x, sizes = lead.yardstick.settings[0], lead.yardstick.sizes[0]
    truth = true_gradient(lead.numbers, x, lead.span)
    _, ours = lead.kernel.value_and_gradient(x, lead.kernel.mesh(x))
    wanted = gradient_error(ours, truth, lead.span, sizes)
    for way in ("forward", "central"):
        for tolerance in (one for one in TOLERANCES if one <= lead.scipy.tolerance):
            route = ScipyRoute(lead.numbers, tolerance)
            rate = route.value_and_gradient if way == "forward" else route.value_and_central_gradient
            for step in DIFFERENCES:
                error = gradient_error(rate(x, step * lead.span)[1], truth, lead.span, sizes)
                if error <= wanted:
                    said = f"{way}, step {step:.0e}, tolerance {tolerance:.0e}, gradient error {error:.0e}"
                    return partial(rate, step=step * lead.span), said
    raise RuntimeError(f"no differences of LSODA bring the gradient as near as {wanted:.1e}")


def accuracy_note(lead: LeadRoutes) -> str:
    return f"tolerance {SEARCH:.0e}, error {lead.error:.0e} of scaled cost and limits"


def chosen_note(chosen: Chosen[Any]) -> str:
    return f"tolerance {chosen.tolerance:.0e}, error {chosen.error:.0e}"
