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

    def gradient_error(self, gradient: Array, span: Array, exact: Array) -> float:
        """Largest error of a gradient at the first setting, scaled and relative to its largest entry."""
        scaled = span / self.sizes[0][:, None]
        return float(np.abs((gradient - exact) * scaled).max() / np.abs(exact * scaled).max())

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


def kernel_error(programme: TrainProgramme, yardstick: Yardstick) -> float:
    """Error of the kernel at search tolerance; RuntimeError when it and LSODA solve different cases."""
    error = yardstick.error(KernelRoute(programme).value)
    if not error < SAME:
        raise RuntimeError(f"kernel and LSODA differ by {error:.1e}: tests/benchmarks and the case disagree")
    return error
