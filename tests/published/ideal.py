"""Inline species for textbook examples: constant heat capacities, chosen heats and equilibrium constants."""

from __future__ import annotations

from tests.bed.build import Tree

R = 8.31446261815324


def isomers(heat: float, entropy_change: float, capacity: float) -> Tree:
    """A and B of one formula; A => B has `heat` J/mol and `entropy_change` J/(mol K) at every temperature."""
    return {
        "A": constant("C4H10", 0.0, 400.0, capacity),
        "B": constant("C4H10", heat, 400.0 + entropy_change, capacity),
    }


def constant(formula: str, enthalpy: float, entropy: float, capacity: float) -> Tree:
    """A species of constant heat capacity, J/mol and J/(mol K)."""
    return powers(formula, enthalpy, entropy, [capacity])


def powers(formula: str, enthalpy: float, entropy: float, capacities: list[float]) -> Tree:
    """A species with cp = sum of capacities[n] T^n."""
    units = ["J/(mol K)", *[f"J/(mol K^{n + 1})" for n in range(1, len(capacities))]]
    return {
        "formula": formula,
        "enthalpy of formation": f"{enthalpy!r} J/mol",
        "entropy": f"{entropy!r} J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {
            "powers of T": [f"{c!r} {unit}" for c, unit in zip(capacities, units, strict=True)]
        },
    }


def through(points: dict[float, float]) -> list[float]:
    """Powers of T of the parabola through three heat capacities by temperature."""
    import numpy as np

    fitted = np.polynomial.Polynomial.fit(list(points), list(points.values()), 2).convert().coef
    return [float(c) for c in fitted]


def arrhenius(k: float, E_over_R: float, unit: str, T_ref: float | None = None) -> Tree:
    """A constant with E/R in K; without T_ref k is the pre-exponential factor."""
    energy = {"is": f"{k!r} {unit}", "activation energy": f"{E_over_R * R!r} J/mol"}
    return energy if T_ref is None else {"at": f"{T_ref!r} K", **energy}
