"""Beds that are hard to integrate, and a second, independent and much tighter integration of each.

A bed is written down once in SI numbers. From these come a case file for the program and a plain NumPy model
for the reference, with flows, pressure and temperature as states of their own, which SciPy integrates at a
relative tolerance of 1e-12 for every flow by itself. `python -m tests.bed.hard` prints work and errors of the
program for all of `hard_beds`.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from reactorstage.chemistry import Constant, Denominator, RateLaw, Term
from reactorstage.train.passing import FINAL, SEARCH, Outcome
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import Tree, one_bed, programme
from tests.bed.laws import with_laws

Floats = NDArray[np.float64]

R = 8.31446261815324
MOLAR_MASS = {"C4H8": 56.108e-3, "C4H10": 58.124e-3, "H2": 2.016e-3, "N2": 28.014e-3}
"""kg/mol, from the standard atomic weights 12.011, 1.008 and 14.007."""

VISCOSITY, VOID, BULK = 1.7e-5, 0.4, 1000.0


@dataclass(frozen=True)
class Species:
    """An invented ideal gas: h [J/mol] and s [J/(mol K)] at 298.15 K and 1 bar, cp in powers of T [K]."""

    formula: str
    h: float
    s: float
    cp: tuple[float, ...]

    def tree(self, data_range: tuple[float, float] | None) -> Tree:
        units = ["J/(mol K)", *(f"J/(mol K^{n})" for n in range(2, 6))]
        cp = [f"{c!r} {unit}" for c, unit in zip(self.cp, units, strict=False)]
        tree: Tree = {
            "formula": self.formula,
            "enthalpy of formation": f"{self.h!r} J/mol",
            "entropy": f"{self.s!r} J/(mol K)",
            "standard pressure": "1 bar(a)",
            "heat capacity": {"powers of T": cp},
        }
        if data_range:
            tree["valid"] = {"temperature": f"{data_range[0]!r} K to {data_range[1]!r} K"}
        return tree


@dataclass(frozen=True)
class Reaction:
    """k at T [K] in mol/(kg s) for mole fractions, or times Pa^-n for partial pressures; E [J/mol].

    orders are those of the equation unless given; `under` holds K of (1 + sum K y)^2 below the rate.
    """

    nu: dict[str, float]
    k: float
    E: float = 0.0
    T: float = 600.0
    orders: dict[str, float] = field(default_factory=dict)
    reversible: bool = False
    pressures: bool = False
    under: dict[str, float] = field(default_factory=dict)

    @property
    def powers(self) -> dict[str, float]:
        return self.orders or {name: -n for name, n in self.nu.items() if n < 0.0}

    @property
    def driver(self) -> str:
        return "partial pressure" if self.pressures else "mole fraction"

    def side(self, sign: int) -> str:
        return " + ".join(f"{abs(n):g} {name}" for name, n in self.nu.items() if sign * n > 0.0)

    @property
    def bare(self) -> bool:
        """Whether the case file refuses the law as it is, for want of a floor."""
        return any(order < 0.0 for order in self.powers.values())

    def tree(self) -> Tree:
        """The reaction in the case file; with orders as written where its own are refused."""
        orders = {} if self.bare else self.orders
        powers = {name: -n for name, n in self.nu.items() if n < 0.0} if self.bare else self.powers
        unit = f"mol/(kg s Pa^{sum(powers.values()):g})" if self.pressures else "mol/(kg s)"
        tree: Tree = {
            "equation": f"{self.side(-1)} {'<=>' if self.reversible else '=>'} {self.side(1)}",
            "rate per": "catalyst mass",
            "driven by": self.driver,
            "orders": orders or "as written",
            "constant": {
                "at": f"{self.T!r} K",
                "is": f"{self.k!r} {unit}",
                "activation energy": f"{self.E!r} J/mol",
            },
        }
        return {**tree, "backward": "from Gibbs energies"} if self.reversible else tree

    def law(self) -> RateLaw:
        """The same law in numbers, with its denominator."""
        terms = [Term(Constant(float(np.log(K))), {name: 1.0}) for name, K in self.under.items()]
        below = (Denominator((Term(Constant(0.0)), *terms), 2.0),) if terms else ()
        constant = Constant(float(np.log(self.k)), self.T, self.E / R)
        return RateLaw("r", self.nu, self.powers, constant, self.driver, self.reversible, denominators=below)


@dataclass(frozen=True)
class Hard:
    """One bed: inlet flows F [mol/s], T [K], p [Pa], catalyst W [kg]; packing (diameter, size) [m] or none.

    named are species whose own exit flow a limit names, data_range [K] is that of the species data.
    """

    name: str
    species: dict[str, Species]
    reactions: tuple[Reaction, ...]
    F: dict[str, float]
    T: float
    W: float
    p: float = 1e6
    packing: tuple[float, float] | None = None
    named: tuple[str, ...] = ()
    data_range: tuple[float, float] | None = None

    @cached_property
    def train(self) -> TrainProgramme:
        """The program's own; flow and temperature of the feed, catalyst, activity and pressure are free."""
        train = programme(self.tree())
        other = any(one.under or one.bare for one in self.reactions)
        return with_laws(train, [one.law() for one in self.reactions]) if other else train

    @property
    def unit(self) -> float:
        return sum(self.F.values())

    @property
    def now(self) -> Floats:
        return np.array([number.now for number in self.train.numbers])

    def tree(self) -> Tree:
        limits = {name: {"of": f"effluent.flow of {name}", "at most": "1e9 mol/s"} for name in self.named}
        tree = one_bed(
            {name: one.tree(self.data_range) for name, one in self.species.items()},
            {f"r{i}": one.tree() for i, one in enumerate(self.reactions)},
            self._feed(),
            "",
            **({"limits": limits} if limits else {}),
        )
        tree["fluid"] = {"density": "ideal gas", "viscosity": f"{VISCOSITY!r} Pa s"}
        tree["train"][1]["bed 1"] = self._bed()
        return tree

    def _feed(self) -> Tree:
        main = max(self.F, key=lambda name: self.F[name])
        shares = {name: f"{100.0 * F / self.unit!r} %" for name, F in self.F.items() if F and name != main}
        return {
            "flow": _range(self.unit, "mol/s"),
            "temperature": _range(self.T, "K", 0.02),
            "composition": {**shares, main: "rest"},
        }

    def _bed(self) -> Tree:
        diameter, size = self.packing or (1.0, 1.0)
        return {
            "catalyst": _range(self.W, "kg"),
            "inlet pressure": _range(self.p, "Pa"),
            "catalyst activity": {"now": 1.0, "from": 0.5, "to": 2.0},
            "diameter": f"{diameter!r} m",
            "bulk density": f"{BULK!r} kg/m^3",
            "void fraction": VOID,
            "equivalent size": f"{size!r} m",
            "pressure drop factor": 1 if self.packing else 0,
        }


def _range(value: float, unit: str, width: float = 0.5) -> Tree:
    value = float(value)
    low, high = value * (1.0 - width), value * (1.0 + width)
    return {"now": f"{value!r} {unit}", "from": f"{low!r} {unit}", "to": f"{high!r} {unit}"}


class Model:
    """The same bed in plain NumPy; the state is z = (F (S,), p, T)."""

    def __init__(self, bed: Hard):
        self.bed = bed
        kinds, laws = list(bed.species.values()), bed.reactions
        longest = max(2, *(len(one.cp) for one in kinds))
        self.c = np.array([[*one.cp, *[0.0] * (longest - len(one.cp))] for one in kinds])
        self.n = np.arange(1, longest + 1)
        self.h0 = np.array([one.h for one in kinds]) - self.c @ (298.15**self.n / self.n)
        self.s0 = np.array([one.s for one in kinds]) - self._entropy(298.15)
        self.mass = np.array([MOLAR_MASS[one.formula] for one in kinds])
        self.F = self._row(bed.F)
        self.nu = np.array([self._row(one.nu) for one in laws])
        ahead = np.array([self._row(one.powers) for one in laws])
        self.orders = np.array([ahead, ahead + self.nu])
        self.whole = (self.orders >= 0.0) & (self.orders == np.round(self.orders))
        self.k, self.E_R = np.array([one.k for one in laws]), np.array([one.E / R for one in laws])
        self.T_k = np.array([one.T for one in laws])
        self.back = np.array([float(one.reversible) for one in laws])
        self.p_power = np.array([one.pressures * sum(one.powers.values()) for one in laws])
        self.K = np.array([self._row(one.under) for one in laws])

    def _row(self, by_name: dict[str, float]) -> Floats:
        return np.array([by_name.get(name, 0.0) for name in self.bed.species])

    def _entropy(self, T: float) -> Floats:
        return self.c[:, 0] * np.log(T) + self.c[:, 1:] @ (T ** self.n[:-1] / self.n[:-1])

    def enthalpy(self, T: float) -> Floats:
        return self.h0 + self.c @ (T**self.n / self.n)

    def ln_K(self, T: float, p: float) -> Floats:
        """ln of the equilibrium constants for mole fractions (R,)."""
        g = self.enthalpy(T) / T - self.s0 - self._entropy(T)
        return -self.nu @ g / R + self.nu.sum(axis=1) * np.log(1e5 / p)

    def products(self, y: Floats) -> Floats:
        """prod y^n forward and backward (2, R); broken and negative n extended through zero, width 1e-12."""
        n, square = self.orders, y * y + 1e-24
        broken = np.where(n > 0.0, y * square ** ((n - 1.0) / 2.0), square ** (n / 2.0))
        found: Floats = np.where(self.whole, y ** np.where(self.whole, n, 1.0), broken).prod(axis=2)
        return found

    def rates(self, F: Floats, p: float, T: float) -> Floats:
        y = F / F.sum()
        force, back = self.products(y)
        if self.back.any():
            force = force - self.back * back * np.exp(-self.ln_K(T, p))
        k = self.k * np.exp(self.E_R * (1.0 / self.T_k - 1.0 / T)) * p**self.p_power
        found: Floats = k * force / (1.0 + self.K @ y) ** 2
        return found

    def slope(self, w: float, z: Floats) -> Floats:
        """dz/dw."""
        F, p, T = z[:-2], z[-2], z[-1]
        dF = self.rates(F, p, T) @ self.nu
        dT = -(dF @ self.enthalpy(T)) / (F @ (self.c @ (T ** (self.n - 1))))
        return np.concatenate([dF, [self.drop(F, p, T), dT]])

    def drop(self, F: Floats, p: float, T: float) -> float:
        """dp/dw by Ergun (Chem. Eng. Prog. 48 (1952) 89, from memory)."""
        if not self.bed.packing:
            return 0.0
        diameter, size = self.bed.packing
        area, solid = np.pi * diameter**2 / 4.0, 1.0 - VOID
        G, u = F @ self.mass / area, F.sum() * R * T / p / area
        viscous = 150.0 * VISCOSITY * solid**2 / (VOID**3 * size**2) * u
        return float(-(viscous + 1.75 * G * u * solid / (VOID**3 * size)) / (BULK * area))

    def start(self) -> Floats:
        return np.concatenate([self.F, [self.bed.p, self.bed.T]])

    def solve(self, method: str = "LSODA", **more: Any) -> Any:
        """SciPy's solution over the bed; each flow relative to itself, down to 1e-22 of the feed."""
        flows = np.full(len(self.F), 1e-22 * self.bed.unit)
        atol = np.append(flows, [1e-12 * self.bed.p, 1e-12 * self.bed.T])
        settings = {"rtol": 1e-12, "atol": atol, "first_step": 1e-22 * self.bed.W, **more}
        found = solve_ivp(self.slope, (0.0, self.bed.W), self.start(), method, **settings)
        assert found.status >= 0, found.message
        return found

    def end(self) -> Floats:
        """(F, p, T) at the exit."""
        found: Floats = self.solve().y[:, -1]
        return found


@dataclass(frozen=True)
class Row:
    """Work of the program for one bed, and its errors against the reference.

    flow is the largest error of a flow, by the feed; named that of a named species, by its own flow (at
    least 1e-9 of the feed); T that of temperature, K; place that of temperature, in depth of the bed: where
    a bed ends on a steep front, all errors there are errors of the front's place.
    """

    name: str
    tolerance: float
    outcome: Outcome
    flow: float = np.nan
    named: float = np.nan
    T: float = np.nan
    place: float = np.nan

    def __str__(self) -> str:
        work = f"{self.name:32s} {self.tolerance:.0e} {self.outcome.steps:5d} {self.outcome.evaluations:5d}"
        errors = f"{self.flow:8.1e} {self.named:8.1e} {self.T:8.1e} {self.place:8.1e}"
        return f"{work}  {self.outcome.failure or errors}"


def run(bed: Hard, tolerance: float, values_only: bool = False) -> Outcome:
    """Adaptive steps at `now`."""
    u, du = bed.train.model.inputs.values(bed.now)
    return bed.train.model.passing.adaptive(u, du[:, :0] if values_only else du, tolerance)


def exit_rows(bed: Hard, outcome: Outcome) -> Floats:
    """F (S,) mol/s, p Pa, T K behind bed 1, each with its derivatives (S + 2, 1 + D)."""
    layout, S = bed.train.model.layout, len(bed.species)
    rows = outcome.out[layout.beds[0].exit * layout.width :]
    return rows[[*range(S), S + 1, S + 2]]


def compare(bed: Hard, right: Floats, tolerance: float, values_only: bool = False) -> Row:
    """One run against the reference's (F, p, T) at the exit."""
    outcome = run(bed, tolerance, values_only)
    if outcome.failure:
        return Row(bed.name, tolerance, outcome)
    away = np.abs(exit_rows(bed, outcome)[:, 0] - right)
    own = away[:-2] / np.maximum(np.abs(right[:-2]), 1e-9 * bed.unit)
    named = max((own[s] for s, name in enumerate(bed.species) if name in bed.named), default=0.0)
    steepness = abs(Model(bed).slope(bed.W, right)[-1]) * bed.W
    place = away[-1] / steepness if steepness > 0.0 else np.inf
    return Row(bed.name, tolerance, outcome, away[:-2].max() / bed.unit, named, away[-1], place)


def table() -> None:
    """Print work and errors of every hard bed at both tolerances."""
    from tests.bed.hard_beds import BEDS

    print(f"{'bed':32s} {'tol':5s} {'steps':>5s} calls  {'flow':8s} {'named':8s} {'T, K':8s} place")
    for bed in BEDS:
        right = Model(bed).end()
        for tolerance in (SEARCH, FINAL):
            print(compare(bed, right, tolerance))


if __name__ == "__main__":
    table()
