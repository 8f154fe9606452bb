"""What rating a train gives. SI units inside; money in currency per second, cost positive."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.train.chemistry import CaseChemistry

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Value:
    """A quantity's value: SI number and kind (see `reactorstage.case.units`), or None and the reason."""

    value: float | None
    kind: str
    reason: str = ""


@dataclass(frozen=True)
class Profile:
    """One bed along its depth: N points from inlet to exit.

    w (N,) kg of catalyst passed in this bed, T (N,) K, p (N,) Pa, F (N, S) mol/s, r (N, R) mol/(kg s),
    T_peak with w_peak: the hottest place, found inside the steps.
    """

    owner: str
    w: Array
    T: Array
    p: Array
    F: Array
    r: Array
    T_peak: float
    w_peak: float


@dataclass(frozen=True)
class StepState:
    """One step of an entry, gap or effluent: the stream after it.

    kind is take, inject, recycle (a recycle injected), heat, cool, remove, pressure drop or draw; what names
    the feed, recycle, level(s), exchanger or species; flow is what came in (mol/s, below zero for what left,
    0 for the others), heat_removed W (positive when removed), T_before and T_after K.
    """

    owner: str
    kind: str
    what: str
    flow: float
    heat_removed: float
    T_before: float | None
    T_after: float


@dataclass(frozen=True)
class LimitState:
    """One expanded limit at this setting: value and bound in SI of its kind, margin positive inside.

    value is None with a reason where the quantity does not exist there (the limit is then met).
    bound has `keep_away` already taken off. met allows 1e-6 of the scale.
    """

    label: str
    owner: str
    quantity: str
    direction: str
    kind: str
    bound: float
    keep_away: float
    value: float | None
    margin: float | None
    met: bool
    at_work: bool
    soft: bool
    implied: bool
    why: str
    reason: str = ""


@dataclass(frozen=True)
class HeatSale:
    """Heat that one place gives to (or takes from) one level: W >= 0, money per second (cost +)."""

    owner: str
    level: str
    heat: float
    money: float
    heating: bool


@dataclass(frozen=True)
class ExchangeState:
    """Heat between two streams: from where to where, W; (in, out) temperatures K of hot and cold stream.

    differences K at the hot and at the cold end, effectiveness as a fraction (None without a difference of
    the inlets), conductance area times coefficient in W/K (None where given by effectiveness).
    """

    name: str
    from_: str
    to: str
    heat: float
    hot: tuple[float, float]
    cold: tuple[float, float]
    differences: tuple[float, float]
    effectiveness: float | None
    conductance: float | None


@dataclass(frozen=True)
class TrainState:
    """One of the states that the closures of a train allow at one setting.

    T_first is the inlet of bed 1, T_hottest the hottest bed exit (K), heat that of the first exchanger (W,
    None without one). stable: the slope condition holds; shown: it is the state that the rating tells about.
    """

    T_first: float
    T_hottest: float
    heat: float | None
    stable: bool
    shown: bool


@dataclass(frozen=True)
class TurningPoint:
    """A fold: two states meet at this heat (W) of an exchanger when its size is changed by the factor needed.

    least: below that size the hotter states vanish; else above it the colder ones.
    """

    exchanger: str
    heat: float
    needed: float
    least: bool


@dataclass(frozen=True)
class Closed:
    """The closures of a train as rated: exchangers, all states, folds, and how well they close.

    residuals by name: of an exchanger relative to its heat (or as a share of the difference of its inlets),
    of a recycle the largest error of its fractions and of its enthalpy relative to cp T.
    """

    exchanges: tuple[ExchangeState, ...] = ()
    states: tuple[TrainState, ...] = ()
    folds: tuple[TurningPoint, ...] = ()
    residuals: Mapping[str, float] = field(default_factory=dict)

    def __bool__(self) -> bool:
        return bool(self.residuals)


@dataclass(frozen=True)
class Rating:
    """A train at one setting: every quantity by name, profiles, limits, money, closure.

    status is one of the words of `reactorstage.optimiser.result` (inside all limits, limits broken,
    no answer); failure is the sentence with the place when the train has no answer, and the beds rated
    before it are still there. x (D,) are the numbers used (user, then internal).
    main_reactant is the split (scarce) reactant, product the species made most, by_products the other
    species that reactions make, most made first. unpriced lists places whose heat carries no price.
    atoms and energy are relative closure errors over the whole train. chemistry is that of the train, for
    pictures that need more than the profiles. closed tells about exchangers and recycles, where there are
    any.
    """

    case: Case
    status: str
    failure: str
    x: Array
    quantities: Mapping[str, Value]
    profiles: tuple[Profile, ...]
    steps: tuple[StepState, ...]
    limits: tuple[LimitState, ...]
    money: Mapping[str, float]
    heat: tuple[HeatSale, ...]
    species: tuple[str, ...]
    reactions: tuple[str, ...]
    nu: Array
    main_reactant: str
    excess_reactant: str
    product: str
    by_products: tuple[str, ...]
    unpriced: tuple[str, ...]
    atoms: float
    energy: float
    notes: tuple[str, ...]
    integration_steps: int
    right_hand_sides: int
    chemistry: CaseChemistry | None = field(default=None, repr=False)
    closed: Closed = field(default_factory=Closed)

    def number(self, name: str) -> float | None:
        """SI value of a quantity by its name; None where it does not exist."""
        return self.quantities[name].value

    def _repr_html_(self) -> str:
        """What notebooks show: the tables of the package's face."""
        from reactorstage import tables

        return tables(self)._repr_html_()
