"""The whole train once more in plain NumPy: Radau IIA on a given step sequence, nothing compiled.

It reads the case itself (sections, steps, feeds) and takes only species tables, rate laws and the edges of
the steps from the program. Every number may be complex and comes as an array over D directions, so that
one run gives D complex-step derivatives.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.polynomial import Polynomial
from numpy.typing import NDArray

from reactorstage.case.model import Activities, Bed, Case, Feed, Number, Section, Step
from reactorstage.chemistry import P_STANDARD, R_GAS, RateLaws, SpeciesTable, basis_factors

Array = NDArray[np.complex128]


def radau() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Nodes (3,) and Runge-Kutta matrix (3, 3): collocation at the roots of the right Radau polynomial."""
    nodes = np.array([(4 - 6**0.5) / 10, (4 + 6**0.5) / 10, 1.0])
    matrix = np.empty((3, 3))
    for j in range(3):
        others = np.delete(nodes, j)
        lagrange = Polynomial.fromroots(others) / np.prod(nodes[j] - others)
        matrix[:, j] = lagrange.integ()(nodes)
    return nodes, matrix


NODES, MATRIX = radau()


@dataclass
class Stream:
    """Molar flows F (D, S), enthalpy flow H (D,), pressure p (D,)."""

    F: Array
    H: Array
    p: Array


@dataclass
class Gas:
    """Properties and rates of many states at once; the last axis is species or reactions."""

    table: SpeciesTable
    laws: RateLaws

    def _pieces(self, T: Array) -> Array:
        """Coefficients (9, ..., S) that hold at T."""
        piece = (T.real > self.table.edges[:, 1]).astype(int) + (T.real > self.table.edges[:, 2])
        found: Array = np.moveaxis(self.table.coefficients[np.arange(piece.shape[-1]), piece], -1, 0)
        return found

    def heat(self, T: Array) -> tuple[Array, Array]:
        """Molar enthalpies and heat capacities (..., S)."""
        T = T[..., None]
        c = self._pieces(T)
        i, t2 = 1 / T, T * T
        cp = (c[0] * i + c[1]) * i + c[2] + T * (c[3] + T * (c[4] + T * (c[5] + T * c[6])))
        h = -c[0] * i + c[1] * np.log(T) + c[7] + c[2] * T
        h = h + t2 * (c[3] / 2 + T * (c[4] / 3 + T * (c[5] / 4 + T * c[6] / 5)))
        return R_GAS * h, R_GAS * cp

    def entropy(self, T: Array) -> Array:
        """Molar entropies (..., S) at the standard pressure."""
        T = T[..., None]
        c = self._pieces(T)
        s = -c[0] / (2 * T**2) - c[1] / T + c[2] * np.log(T) + c[3] * T + c[4] * T**2 / 2
        return R_GAS * (s + c[5] * T**3 / 3 + c[6] * T**4 / 4 + c[8])

    def enthalpy(self, F: Array, T: Array) -> Array:
        return np.sum(F * self.heat(T)[0], axis=-1)

    def temperature(self, F: Array, H: Array, T: float) -> Array:
        """T with H(F, T) = H."""
        T = np.full(H.shape, T, dtype=complex)
        for _ in range(20):
            h, cp = self.heat(T)
            step = (H - np.sum(F * h, axis=-1)) / np.sum(F * cp, axis=-1)
            T = T + step
            if np.max(np.abs(step)) < 1e-6:
                break
        return T

    def rates(self, F: Array, T: Array, p: Array, factor: Array) -> Array:
        """Rates (..., R) times factor (..., R), by the formulas of `law`, `orders` and `rate_law`."""
        laws = self.laws
        ln_K = (self.entropy(T) - self.heat(T)[0] / T[..., None]) @ laws.nu.T / R_GAS
        y = F / np.sum(F, axis=-1, keepdims=True)
        found = []
        for r in range(len(laws.m)):
            total = (p / (R_GAS * T), p, np.ones_like(p), p)[laws.driver[r]]
            standard = (P_STANDARD / (R_GAS * T), P_STANDARD + 0 * p, P_STANDARD / p, P_STANDARD + 0 * p)
            k = constant(laws.lnk_ref[r], laws.T_ref[r], laws.E_over_R[r], laws.c[r], laws.d[r], T)
            common, ahead, back = self._split(r)
            force = self._product(y, ahead, total)
            if laws.reversible[r]:
                K = constant(*laws.K_form[r], T) if laws.own_K[r] else np.exp(ln_K[..., r])
                K = K * standard[laws.driver[r]] ** laws.nu[r].sum()
                force = force - self._product(y, back, total) / K ** laws.m[r]
            force = force * self._floored(r, y, common, total)
            rate = factor[..., r] * k * force / self._denominator(r, y, T, total)
            found.append(rate * self._effectiveness(r, rate, y, T, p))
        return np.stack(found, axis=-1)

    def _split(self, r: int) -> tuple[Array, Array, Array]:
        """Orders of floored drivers, and what is left of the forward and the backward orders."""
        laws = self.laws
        alpha, nu = laws.alpha[r], laws.nu[r]
        beta = alpha + laws.m[r] * nu if laws.reversible[r] else np.zeros_like(alpha)
        common = np.zeros_like(alpha)
        for s in np.flatnonzero(laws.floor[r]):
            if laws.reversible[r]:
                n = min(alpha[s], beta[s])
            else:
                n = alpha[s] - (nu[s] < 0 and not (alpha[s] >= 1 and alpha[s] % 1 == 0))
            common[s] = 0.0 if n >= 0 and n % 1 == 0 else n
        return common, alpha - common, beta - common

    def _product(self, y: Array, orders: Array, total: Array) -> Array:
        value = total ** orders.sum()
        for s in np.flatnonzero(orders):
            value = value * _power(y[..., s], orders[s])
        return value

    def _floored(self, r: int, y: Array, orders: Array, total: Array) -> Array:
        value = total ** orders.sum()
        for s in np.flatnonzero(orders):
            value = value * floored(y[..., s], self.laws.floor[r, s]) ** orders[s]
        return value

    def _denominator(self, r: int, y: Array, T: Array, total: Array) -> Array:
        laws, value = self.laws, np.ones_like(T)
        for n in range(laws.den_start[r], laws.den_start[r + 1]):
            under = np.zeros_like(T)
            for j in range(laws.term_start[n], laws.term_start[n + 1]):
                form = laws.term_lnK_ref[j], laws.term_T_ref[j], laws.term_H_over_R[j]
                K = constant(*form, laws.term_c[j], laws.term_d[j], T)
                broken = (laws.floor[r] > 0) & ((laws.gamma[j] < 0) | (laws.gamma[j] % 1 != 0))
                plain = self._product(y, np.where(broken, 0.0, laws.gamma[j]), total)
                under += K * plain * self._floored(r, y, np.where(broken, laws.gamma[j], 0.0), total)
            value = value * under ** laws.den_power[n]
        return value

    def _effectiveness(self, r: int, rate: Array, y: Array, T: Array, p: Array) -> Array:
        kind, eta, (key, made) = self.laws.eta_kind[r], self.laws.eta[r], self.laws.eta_species[r]
        if kind == 0:
            return np.ones_like(T)
        if kind == 1:
            Z = 0.0 * T if key < 0 else eta[9] * y[..., made] / (y[..., key] + eta[9] * y[..., made])
            value = sum(b * T**n for n, b in enumerate(eta[:5]))
            return floored(value + sum(z * Z ** (n + 1) for n, z in enumerate(eta[5:9])), 1e-4)
        C_key = floored(y[..., key], 1e-9) * p / (R_GAS * T)
        square = eta[0] * rate * np.sign(rate.real) / C_key
        still = np.abs(square) < 1e-8
        phi = np.sqrt(np.where(still, 1.0, square))
        if kind == 2:
            return np.where(still, 1 - square / 3, np.tanh(phi) / phi)
        return np.where(still, 1 - square / 15, 3 * (phi / np.tanh(phi) - 1) / phi**2)


def constant(ln_ref: float, T_ref: float, E_over_R: float, c: float, d: float, T: Array) -> Array:
    """A constant of the form that all constants have."""
    away = E_over_R * (1 / T_ref - 1 / T)
    found: Array = np.exp(ln_ref + away + d * (T - T_ref)) * (T / T_ref) ** c
    return found


def floored(y: Array, floor: float) -> Array:
    """A number that stays above zero, by its smooth floor."""
    return (y + np.sqrt(y * y + 4 * floor**2)) / 2


def _power(y: Array, n: float) -> Array:
    """y^n; broken and negative orders are extended through zero with a width of 1e-12."""
    if n >= 0 and n == round(n):
        return y ** int(n)
    square = y * y + 1e-24
    return y * square ** ((n - 1) / 2) if n > 0 else square ** (n / 2)


@dataclass
class Layer:
    """One bed: the slope of y = (extents [mol/s], pressure [Pa]) over its depth 0..1."""

    gas: Gas
    bed: Bed
    inlet: Stream
    T: float
    W: Array
    activity: Array
    friction: Array
    viscosity: float
    profile: tuple[list[float], list[float]] | None = None

    def slope(self, y: Array, depth: Array, lead: tuple[int, ...] = ()) -> Array:
        """dy/d(depth) at depth (3,) for y (3, D, R + 1); `lead` picks a direction instead of the axis D."""
        inlet, R = self.inlet, self.gas.laws.nu.shape[0]
        F_in, H, W, activity, friction = (
            (a[lead] if lead else a) for a in (inlet.F, inlet.H, self.W, self.activity, self.friction)
        )
        F = F_in + y[..., :R] @ self.gas.laws.nu
        T, p = self.gas.temperature(F, np.broadcast_to(H, y.shape[:-1]), self.T), y[..., R]
        per_kg = basis_factors(self.gas.laws, self.bed.bulk_density or 1.0, self.bed.void_fraction or 1.0)
        here = np.interp(depth, *self.profile) if self.profile else np.ones(len(depth))
        r = self.gas.rates(F, T, p, activity * per_kg * here[:, None, None])
        drop = friction * self.gradient(F, T, p)
        return np.concatenate([np.asarray(W)[..., None] * r, (W * drop)[..., None]], axis=-1)

    def gradient(self, F: Array, T: Array, p: Array) -> Array:
        """dp/dw by Ergun (Chem. Eng. Prog. 48 (1952) 89, from memory)."""
        bed = self.bed
        if not (bed.diameter and bed.bulk_density and bed.void_fraction and bed.equivalent_size):
            return np.zeros_like(T)
        eps, d, area = bed.void_fraction, bed.equivalent_size, np.pi * bed.diameter**2 / 4
        mass = F @ self.gas.table.molar_mass
        rho = mass * p / (np.sum(F, axis=-1) * R_GAS * T)
        u = mass / area / rho
        dp_dz = -150 * self.viscosity * (1 - eps) ** 2 / (eps**3 * d**2) * u
        dp_dz = dp_dz - 1.75 * rho * (1 - eps) / (eps**3 * d) * u**2
        return dp_dz / (bed.bulk_density * area)

    def jacobian(self, y: Array, depth: Array) -> NDArray[np.float64]:
        """(3, n, n) at the real part of direction 0, by complex step; y (3, n), depth (3,)."""
        n = y.shape[-1]
        size = np.append(np.full(n - 1, np.sum(self.inlet.F[0].real)), self.inlet.p[0].real)
        moved = y.real[:, None, :] + 1j * 1e-20 * np.diag(size)
        found = self.slope(moved, depth, (0,)).imag / 1e-20 / size[:, None]
        return np.swapaxes(found, -1, -2)

    def step(self, y: Array, low: float, h: float) -> Array:
        """The three stages (3, D, n) of a step of length h from y (D, n) at depth low: full Newton."""
        D, n = y.shape
        size = np.append(np.full(n - 1, np.sum(self.inlet.F[0].real)), self.inlet.p[0].real)
        stages, settled = np.repeat(y[None], 3, axis=0), 0
        for _ in range(40):
            slopes = self.slope(stages, low + NODES * h)
            miss = y + h * np.einsum("ij,jdk->idk", MATRIX, slopes) - stages
            J = self.jacobian(stages[:, 0], low + NODES * h)
            M = np.eye(3 * n) - h * np.einsum("ij,jkl->ikjl", MATRIX, J).reshape(3 * n, 3 * n)
            change = np.linalg.solve(M, miss.transpose(0, 2, 1).reshape(3 * n, D))
            change = change.reshape(3, n, D).transpose(0, 2, 1)
            stages = stages + change
            settled += bool(np.max(np.abs(change) / size) < 1e-13)
            if settled == 2:
                return stages
        raise ArithmeticError("the stages did not converge")

    def exit(self, edges: NDArray[np.float64]) -> Stream:
        D, R = self.inlet.F.shape[0], self.gas.laws.nu.shape[0]
        y = np.concatenate([np.zeros((D, R), complex), self.inlet.p[:, None]], axis=1)
        for low, high in pairwise(edges):
            y = self.step(y, low, high - low)[2]
        return Stream(self.inlet.F + y[:, :R] @ self.gas.laws.nu, self.inlet.H, y[:, R])


@dataclass
class Twin:
    """A case with some of its numbers replaced by `values`, name -> (D,)."""

    case: Case
    gas: Gas
    values: Mapping[str, Array]
    D: int
    edges: list[NDArray[np.float64]]
    found: dict[str, Array] = field(default_factory=dict)

    def number(self, name: str, number: Number) -> Array:
        return np.asarray(self.values.get(name, np.full(self.D, complex(number.now))))

    def run(self) -> dict[str, Array]:
        """Quantities by name, (D,) each."""
        sections, stream = list(self.case.train), None
        for section, following in zip(sections, [*sections[1:], None], strict=True):
            stream = self._bed(section, stream) if section.bed else self._place(section, following, stream)
        return self.found

    def fractions(self, feed: Feed) -> NDArray[np.float64]:
        shares = np.array([feed.composition.get(name, 0.0) for name in self.gas.table.names])
        shares = shares / self.gas.table.molar_mass if self.case.percent == "mass" else shares
        return shares / shares.sum()

    def _amount(self, name: str, bed: str) -> Array:
        """Molar flow of a feed into a bed: the whole, an entry of its split, or what the others leave."""
        feed = self.case.feeds[name]
        molar = float(self.fractions(feed) @ self.gas.table.molar_mass)
        whole = self.number(f"feed {name}.flow", feed.flow) / (
            molar if feed.flow.kind == "mass flow" else 1.0
        )
        if feed.split is None:
            return whole
        split = feed.split
        if bed == split.rest:
            return whole - sum(self._amount(name, other) for other in split.beds if other != bed)
        entry = split.values[bed]
        if entry.kind == "fraction":
            return whole * self.number(f"{bed}.share of {name}", entry)
        return self.number(f"{bed}.injected {name}", entry) / (molar if entry.kind == "mass flow" else 1.0)

    def _mixed(self, stream: Stream | None, name: str, bed: str) -> Stream:
        feed = self.case.feeds[name]
        F = self._amount(name, bed)[:, None] * self.fractions(feed)
        H = self.gas.enthalpy(F, self.number(f"feed {name}.temperature", feed.temperature))
        if stream is None:
            return Stream(F, H, np.zeros(self.D, complex))
        return Stream(stream.F + F, stream.H + H, stream.p)

    def _removed(self, owner: str, step: Step, stream: Stream) -> Array:
        if step.to is not None:
            return stream.H - self.gas.enthalpy(stream.F, self.number(f"{owner}.exit temperature", step.to))
        word = "added" if step.kind == "heat" else "removed"
        assert step.heat is not None
        return self.number(f"{owner}.heat {word}", step.heat) * (-1 if step.kind == "heat" else 1)

    def _place(self, section: Section, following: Section | None, stream: Stream | None) -> Stream:
        bed, removed, held = following.owner if following else "", np.zeros(self.D, complex), False
        after, after_held = None, False
        for step in section.steps:
            if step.kind in ("take", "inject"):
                stream = self._mixed(stream, step.feed or "", bed)
                continue
            assert stream is not None
            if step.holds:
                held = True
            else:
                Q = self._removed(section.owner, step, stream)
                removed, stream = removed + Q, Stream(stream.F, stream.H - Q, stream.p)
            after, after_held = stream, held
        assert stream is not None
        Q = np.zeros(self.D, complex)
        if following and following.bed:
            stream, Q = self._arrived(following, stream, held)
        if after is not None:
            H = after.H - Q if after_held else after.H
            self.found[f"{section.owner}.temperature after exchanger"] = self._T(Stream(after.F, H, after.p))
        self.found[f"{section.owner}.heat removed"] = removed + Q
        self.found[f"{section.owner}.exit temperature"] = self._T(stream)
        return stream

    def _arrived(self, bed: Section, stream: Stream, held: bool) -> tuple[Stream, Array]:
        given, Q, p = bed.bed, np.zeros(self.D, complex), stream.p
        assert given is not None
        if given.inlet_pressure is not None:
            p = self.number(f"{bed.owner}.inlet pressure", given.inlet_pressure)
        if held and given.inlet_temperature is not None:
            T = self.number(f"{bed.owner}.inlet temperature", given.inlet_temperature)
            Q = stream.H - self.gas.enthalpy(stream.F, T)
        return Stream(stream.F, stream.H - Q, p), Q

    def _activities(self, owner: str, bed: Bed) -> Array:
        """Catalyst activity for each reaction (D, R)."""
        common = self.number(f"{owner}.catalyst activity", bed.catalyst_activity)
        each = bed.catalyst_activity.each if isinstance(bed.catalyst_activity, Activities) else {}
        own = {name: self.number(f"{owner}.catalyst activity of {name}", one) for name, one in each.items()}
        return np.stack([own.get(name, common) for name in self.case.reactions], axis=-1)

    def _T(self, stream: Stream) -> Array:
        return self.gas.temperature(stream.F, stream.H, 600.0)

    def _bed(self, section: Section, stream: Stream | None) -> Stream:
        bed, owner = section.bed, section.owner
        assert bed is not None and stream is not None
        W = self.number(f"{owner}.catalyst", bed.catalyst)
        if bed.state == "bypassed":
            return self._behind(owner, stream, stream)
        W = W * (bed.bulk_density or 1.0) if bed.catalyst.kind == "volume" else W
        layer = Layer(
            self.gas,
            bed,
            stream,
            float(self._T(stream)[0].real),
            W,
            self._activities(owner, bed),
            self.number(f"{owner}.pressure drop factor", bed.pressure_drop_factor),
            self.case.fluid.viscosity,
            _profile(bed),
        )
        out = layer.exit(self.edges[int(owner.split()[1]) - 1])
        return self._behind(owner, stream, out)

    def _behind(self, owner: str, stream: Stream, out: Stream) -> Stream:
        self.found[f"{owner}.inlet temperature"] = self._T(stream)
        self.found[f"{owner}.exit temperature"] = self._T(out)
        self.found[f"{owner}.exit pressure"] = out.p
        for s, name in enumerate(self.gas.table.names):
            self.found[f"{owner}.exit flow of {name}"] = out.F[:, s]
        return out


def _profile(bed: Bed) -> tuple[list[float], list[float]] | None:
    """Depths and shares of an activity along depth."""
    points = bed.activity_along_depth
    return ([one.at for one in points], [one.is_ for one in points]) if points else None
