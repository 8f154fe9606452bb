"""The beds that are hard to integrate, in SI numbers; all species and kinetics are invented."""

from __future__ import annotations

from typing import Any

from tests.bed.hard import Hard, Reaction, Species

INERT = Species("N2", 0.0, 191.6, (29.0,))
TO_B, TO_C = {"A": -1.0, "B": 1.0}, {"B": -1.0, "C": 1.0}
TO_P = {"A": -1.0, "H": -1.0, "P": 1.0}
THIN = {"A": 10.0, "I": 90.0}
RICH = {"A": 25.0, "I": 75.0}


def isomer(h: float, s: float = 300.0, cp: float = 80.0) -> Species:
    return Species("C4H8", h, s, (cp,))


def pair(heat: float, s: float = 295.0) -> dict[str, Species]:
    """A -> B in an inert gas, with a heat of reaction in J/mol."""
    return {"A": isomer(0.0), "B": isomer(heat, s), "I": INERT}


ADDITION = {
    "A": Species("C4H8", 0.0, 300.0, (20.0, 0.2)),
    "H": Species("H2", 0.0, 130.7, (29.0,)),
    "P": Species("C4H10", -110e3, 310.0, (25.0, 0.23)),
    "I": INERT,
}
CHAIN = {"A": isomer(0.0), "B": isomer(-60e3), "C": isomer(-90e3, 290.0), "I": INERT}


def turn(name: str, heat: float, law: Reaction, feed: dict[str, float], W: float, **more: Any) -> Hard:
    """A -> B by one law, from 600 K."""
    return Hard(name, pair(heat), (law,), feed, 600.0, W, **more)


def runaway(name: str, W: float, **more: Any) -> Hard:
    """Adiabatic rise 1317 K; lights off behind 2.97 kg."""
    return turn(name, -220e3, Reaction(TO_B, 1.0, 90e3), RICH, W, **more)


def depletion(
    name: str, W: float, E: float = 0.0, heat: float = 0.0, order: float = 1.0, **more: Any
) -> Hard:
    """A alone, used up; isothermal unless E and heat are given."""
    law = Reaction(TO_B, 10.0, E, orders={"A": order})
    return turn(name, heat, law, THIN, W, **{"named": ("A",), **more})


def autocatalytic(name: str, seed: float, W: float, **more: Any) -> Hard:
    """A + B -> 2 B from a trace of B, mol/s in 100 mol/s."""
    law = Reaction(TO_B, 100.0, 50e3, orders={"A": 1.0, "B": 1.0})
    return turn(name, -60e3, law, {**THIN, "B": seed}, W, **more)


def self_slowed(name: str, order: float, W: float, own: float = 1.0) -> Hard:
    """Its product, absent at the inlet, slows the reaction with a negative order; own is that of A."""
    law = Reaction(TO_B, 1.0, 60e3, orders={"A": own, "B": order})
    return turn(name, -60e3, law, THIN, W, named=("A", "B"))


def covered(name: str, W: float) -> Hard:
    """A covers the catalyst, so that the rate rises a thousandfold as A disappears."""
    law = Reaction(TO_B, 300.0, 60e3, under={"A": 1e3})
    return turn(name, -60e3, law, THIN, W, named=("A",))


def equilibrium(name: str, W: float, **more: Any) -> Hard:
    """A + H <-> P; 0.5 kg leave 3e-5 of the way to equilibrium."""
    law = Reaction(TO_P, 300.0, 70e3, reversible=True)
    return Hard(name, ADDITION, (law,), {"A": 8.0, "H": 10.0, "I": 82.0}, 680.0, W, **more)


def chain(name: str, k1: float, k2: float, W: float, back: bool = False, **more: Any) -> Hard:
    """A -> B -> C with B and C absent at the inlet."""
    laws = (Reaction(TO_B, k1, 60e3, reversible=back), Reaction(TO_C, k2, 80e3))
    return Hard(name, CHAIN, laws, THIN, 600.0, W, **more)


def seeded(name: str, W: float) -> Hard:
    """Autocatalysis without a trace in the feed: a reaction 1e9 times slower makes the first of it."""
    quick = Reaction(TO_B, 100.0, 50e3, orders={"A": 1.0, "B": 1.0})
    return Hard(name, pair(-60e3), (Reaction(TO_B, 1e-7, 50e3), quick), THIN, 600.0, W)


def branching(name: str, W: float) -> Hard:
    """A + X -> 2 Y, A + Y -> 2 Z, A + Z -> 2 X: no reaction makes what it is driven by."""
    kinds = {one: isomer(0.0 if one == "A" else -40e3) for one in "AXYZ"}
    steps = (("X", "Y", 90.0), ("Y", "Z", 60.0), ("Z", "X", 40.0))
    laws = tuple(Reaction({"A": -1.0, a: -1.0, b: 2.0}, k, 50e3) for a, b, k in steps)
    return Hard(name, {**kinds, "I": INERT}, laws, {**THIN, "X": 1e-7}, 600.0, W)


def side_by_side(name: str, S: int) -> Hard:
    """S isomers in S / 2 reactions, every second one reversible."""
    names = [f"A{i}" for i in range(S)]
    kinds = {one: isomer(-4e3 * i, 300.0 - 0.2 * i, 70.0 + i % 3) for i, one in enumerate(names)}
    laws = tuple(
        Reaction({a: -1.0, b: 1.0}, 30.0 / (1 + i), 50e3 + 2e3 * i, reversible=i % 2 == 0)
        for i, (a, b) in enumerate(zip(names[::2], names[1::2], strict=True))
    )
    return Hard(name, {**kinds, "I": INERT}, laws, {**dict.fromkeys(names[::2], 2.0), "I": 80.0}, 600.0, 50.0)


def network(name: str, S: int, W: float) -> Hard:
    """S isomers: a row A0 -> A1 -> ..., every second step reversible, and a by-product from each."""
    names, half = [f"A{i}" for i in range(S)], S // 2
    kinds = {one: isomer(-6e3 * i, 300.0 - 0.2 * i, 70.0 + i % 3) for i, one in enumerate(names)}
    laws = []
    for i in range(half // 2):
        k, E = 20.0 * (1 + i % 4), 50e3 + 2e3 * i
        laws.append(Reaction({names[i]: -1.0, names[i + 1]: 1.0}, k, E, reversible=i % 2 == 0))
        laws.append(Reaction({names[i]: -1.0, names[half + i]: 1.0}, 0.3 * (1 + i), 70e3))
    named = (names[1], names[half])
    return Hard(name, {**kinds, "I": INERT}, tuple(laws), {"A0": 20.0, "I": 80.0}, 600.0, W, named=named)


def cooling(name: str, heat: float, s: float, W: float, back: bool, **more: Any) -> Hard:
    """Endothermic A -> B from 900 K."""
    law = Reaction(TO_B, 20.0, 120e3, 850.0, reversible=back)
    return Hard(name, pair(heat, s), (law,), {"A": 60.0, "I": 40.0}, 900.0, W, **more)


def inhibited(name: str, W: float) -> Hard:
    """A + H -> P of order -0.5 in A, which is in excess."""
    law = Reaction(TO_P, 1.0, 60e3, orders={"A": -0.5, "H": 1.0})
    return Hard(name, ADDITION, (law,), {"A": 10.0, "H": 9.0, "I": 81.0}, 500.0, W, named=("H", "P"))


def throttled(name: str, W: float, p: float = 1e6) -> Hard:
    """Pressure falls along the bed and drives rate and equilibrium."""
    law = Reaction(TO_P, 3e-11, 70e3, reversible=True, pressures=True)
    feed = {"A": 4.0, "H": 10.0, "I": 86.0}
    return Hard(name, ADDITION, (law,), feed, 580.0, W, p, (0.6, 0.003), ("A",))


HOT = {"E": 60e3, "heat": -120e3}

BEDS = (
    turn("plain", -60e3, Reaction(TO_B, 10.0, 60e3), THIN, 6.0, named=("A",)),
    runaway("runaway burnt early", 20.0),
    runaway("runaway near the end", 2.86),
    runaway("runaway cut on its front", 2.9703),
    turn("runaway of order 2", -220e3, Reaction(TO_B, 10.0, 120e3, orders={"A": 2.0}), RICH, 4.0),
    turn("light-off after long waiting", -220e3, Reaction(TO_B, 1e-4, 250e3), RICH, 9570.7),
    equilibrium("equilibrium, just", 0.5, named=("A",)),
    equilibrium("equilibrium x 100", 50.0, named=("A",)),
    equilibrium("equilibrium x 1000", 500.0, named=("A",)),
    equilibrium("equilibrium, 1000 t", 1e6, named=("A",)),
    equilibrium("equilibrium, 1 g", 1e-3, named=("P",)),
    depletion("isothermal to 1e-6", 138.155),
    depletion("isothermal to 1e-8", 184.2),
    depletion("isothermal to 1e-8, not named", 184.2, named=()),
    depletion("hot to 1e-7", 3.95, **HOT),
    depletion("order 2 x 1000", 2e5, **HOT, order=2.0),
    depletion("order 2 x 1e6", 2e8, **HOT, order=2.0),
    depletion("order 1.5 to 1e-8", 1e4, **HOT, order=1.5),
    depletion("order 0.5, 90 % used", 5.0, order=0.5),
    depletion("order 0.5, used up", 40.0, order=0.5),
    depletion("order 0.5, used up, hot", 40.0, **HOT, order=0.5),
    depletion("order 0.1, used up", 3.0, order=0.1),
    depletion("order 0.1, used up, not named", 3.0, order=0.1, named=()),
    autocatalytic("autocatalytic from 1e-5", 1e-3, 90.0),
    autocatalytic("autocatalytic from 1e-8", 1e-6, 150.0),
    autocatalytic("autocatalytic from 1e-11", 1e-9, 220.0),
    autocatalytic("autocatalytic, named", 1e-9, 220.0, named=("B",)),
    autocatalytic("autocatalytic, cut half way", 1e-6, 133.2),
    autocatalytic("autocatalytic from nothing", 0.0, 50.0),
    seeded("autocatalytic after a slow seed", 190.0),
    branching("branching from 1e-9", 290.0),
    self_slowed("product order -0.5", -0.5, 10.0),
    self_slowed("product order -1", -1.0, 2.0),
    self_slowed("product -1, reactant 0.5", -1.0, 2.0, own=0.5),
    inhibited("reactant order -0.5", 30.0),
    covered("adsorption lets go", 740.0),
    chain("traces at zero", 1.0, 0.1, 3.0, named=("B", "C")),
    chain("rates 1e6 apart", 1.0, 1e6, 34.0, named=("A", "B")),
    chain("rates 1e6 apart, not named", 1.0, 1e6, 34.0),
    chain("fast equilibrium before", 1e6, 1.0, 5.0, back=True, named=("A", "B")),
    cooling("endothermic", 180e3, 480.0, 100.0, False, named=("B",)),
    cooling("endothermic to equilibrium", 120e3, 440.0, 1e5, True, named=("A",)),
    throttled("half the pressure", 1000.0),
    side_by_side("20 species side by side", 20),
    side_by_side("40 species side by side", 40),
    network("network of 20 species", 20, 8.0),
    network("network of 40 species", 40, 4.0),
)
