"""Equal accuracy: the loosest tolerance at which a reference route is as right as the kernel's search."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Generic, Protocol, TypeVar

import numpy as np

from reactorstage.optimiser.starts import starts
from reactorstage.train.programme import TrainProgramme
from tests.benchmarks.kernel_route import KernelRoute
from tests.benchmarks.lead import Array, Lead
from tests.benchmarks.scipy_route import ScipyRoute

REFERENCE = 1e-12
SETTINGS = 8
TOLERANCES = tuple(float(10.0 ** (-k / 2)) for k in range(8, 23))
SAME = 1e-3
CENTRAL = 1e-4
"""Step of the central differences as a share of each range: truncation and noise are below 1e-7."""


class Route(Protocol):
    def value(self, x: Array) -> Array: ...


R = TypeVar("R", bound=Route)


@dataclass(frozen=True)
class Chosen(Generic[R]):
    """A route at the tolerance at which its error (scaled, median over the settings) is the kernel's."""

    route: R
    tolerance: float
    error: float


@dataclass(frozen=True)
class Yardstick:
    """Settings of the lead case, what LSODA finds there at 1e-12, and the sizes of cost and margins."""

    settings: Sequence[Array]
    truth: Sequence[Array]
    sizes: Sequence[Array]

    @classmethod
    def of(cls, programme: TrainProgramme, lead: Lead) -> Yardstick:
        kernel, exact = KernelRoute(programme), ScipyRoute(lead, REFERENCE)
        settings = [start.x for start in starts(programme, SETTINGS, 1)]
        return cls(settings, [exact.value(x) for x in settings], [kernel.sizes(x) for x in settings])

    def error(self, value: Callable[[Array], Array]) -> float:
        """Largest scaled error of cost and margins, median over the settings."""
        errors = [
            np.abs((value(x) - truth) / size).max()
            for x, truth, size in zip(self.settings, self.truth, self.sizes, strict=True)
        ]
        return float(np.median(errors))

    def chosen(self, make: Callable[[float], R], wanted: float) -> Chosen[R]:
        """The route at the loosest tolerance with an error of at most `wanted`.

        A tolerance that the library cannot integrate with is passed over. Raises RuntimeError when none
        does: the route then does not describe the lead case as the yardstick does.
        """
        for tolerance in TOLERANCES:
            route = make(tolerance)
            try:
                error = self.error(route.value)
            except RuntimeError:
                continue
            if error <= wanted:
                return Chosen(route, tolerance, error)
        raise RuntimeError(f"no tolerance brings {make(REFERENCE)} as near as {wanted:.1e}: other equations?")


def true_gradient(lead: Lead, x: Array, span: Array) -> Array:
    """Derivatives (35, 7) of cost and margins by central differences of LSODA at 1e-12."""
    exact = ScipyRoute(lead, REFERENCE)
    sides = [exact.value(x + CENTRAL * one) - exact.value(x - CENTRAL * one) for one in np.diag(span)]
    return np.array(sides).T / (2 * CENTRAL * span)


def gradient_error(gradient: Array, truth: Array, span: Array, sizes: Array) -> float:
    """Largest error of scaled derivatives, relative to the largest of them."""
    scaled = span / sizes[:, None]
    return float(np.abs((gradient - truth) * scaled).max() / np.abs(truth * scaled).max())


def kernel_error(programme: TrainProgramme, yardstick: Yardstick) -> float:
    """Error of the kernel at search tolerance; RuntimeError when it and LSODA solve different cases."""
    error = yardstick.error(KernelRoute(programme).value)
    if not error < SAME:
        raise RuntimeError(f"kernel and LSODA differ by {error:.1e}: tests/benchmarks and the case disagree")
    return error
