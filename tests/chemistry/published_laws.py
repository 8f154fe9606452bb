"""Published rate laws in the words of the case file, each with its own equilibrium constant.

Every constant is from memory of the publication named beside it. Where the publication's gas constant is
8.314 J/(mol K) its energies are divided by that, and temperatures in degrees Rankine by 1.8.
"""

from __future__ import annotations

from math import log
from typing import Any

Tree = dict[str, Any]


def exp_of(a: float, b: float = 0.0, c: float = 0.0, unit: str = "") -> Tree:
    """exp(a + b/T + c ln T) in a unit."""
    form: Tree = {"a": repr(a), "b": f"{b!r} K"}
    if c:
        form["c"] = repr(c)
    return {"exp of": form, **({"in": unit} if unit else {})}


def gas(*names: str) -> Tree:
    """Species of Cantera's data under their own names."""
    return {name: {"gas data": name} for name in names}


SO2 = gas("SO2", "O2", "SO3", "N2")

EKLUND: Tree = {
    "equation": "SO2 + 0.5 O2 <=> SO3",
    "rate per": "catalyst mass",
    "driven by": "partial pressure",
    "orders": {"SO2": 0.5, "SO3": -0.5, "O2": 1},
    "constant": exp_of(912.8 - 110.1 * log(1.8), -176_008.0 / 1.8, -110.1, "kmol/(kg s atm)"),
    "power of K": 2,
    "backward": {"equilibrium constant": exp_of(-11.24, 42_311.0 / 1.987 / 1.8, unit="atm^-0.5")},
    "floor": {"SO3": "0.001 %"},
    "source": "Eklund (1956) as in Fogler, from memory",
}
"""r = k (pSO2/pSO3)^1/2 [pO2 - (pSO3/(Kp pSO2))^2], p in atm, k in lbmol/(lb s atm) = kmol/(kg s atm).

R.-B. Eklund, The Rate of Oxidation of Sulfur Dioxide with a Commercial Vanadium Catalyst (1956), as in
Fogler, Elements of Chemical Reaction Engineering.
"""

COLLINA: Tree = {
    "equation": "SO2 + 0.5 O2 <=> SO3",
    "rate per": "catalyst mass",
    "driven by": "partial pressure",
    "orders": {"SO2": 1, "O2": 1},
    "constant": exp_of(12.160 - log(22.414), -5_473.0, unit="kmol/(kg h atm^2)"),
    "slowed by": [
        {
            "power": 2,
            "terms": [
                1,
                {"constant": exp_of(-9.953, 8_619.0, unit="1/atm"), "orders": {"SO2": 1}},
                {"constant": exp_of(-71.745, 52_596.0, unit="1/atm"), "orders": {"SO3": 1}},
            ],
        }
    ],
    "backward": {
        "equilibrium constant": exp_of(-10.68, 11_300.0, unit="atm^-0.5"),
        "may differ from Gibbs by": "20 %",
    },
    "valid": {"temperature": "420 degC to 590 degC"},
    "source": "Collina, Corbetta, Cappelli (1971) as in Froment and Bischoff, from memory",
}
"""r = k1 pO2 pSO2 [1 - pSO3/(Kp pSO2 pO2^1/2)]/(22.414 (1 + K2 pSO2 + K3 pSO3)^2), kmol/(kg h), p in atm.

Collina, Corbetta, Cappelli (1971), as in Froment and Bischoff, Chemical Reactor Analysis and Design, ch. 11.
"""

NH3 = gas("N2", "H2", "NH3", "Ar")


def temkin(alpha: float = 0.5) -> Tree:
    """r = k1 pN2 (pH2^3/pNH3^2)^alpha - k-1 (pNH3^2/pH2^3)^(1 - alpha), kmol N2/(m3 h), p in bar.

    Temkin and Pyzhev (1940); constants of Morud and Skogestad, AIChE J. 44 (1998) 888, for alpha = 1/2.
    """
    order = f"{1.0 + 3.0 * alpha - 2.0 * alpha:g}"
    return {
        "equation": "N2 + 3 H2 <=> 2 NH3",
        "rate per": "bed volume",
        "driven by": "partial pressure",
        "orders": {"N2": 1, "H2": 3.0 * alpha, "NH3": -2.0 * alpha},
        "constant": exp_of(log(1.79e4), -87_090.0 / 8.314, unit=f"kmol/(m^3 h bar^{order})"),
        "backward": {
            "equilibrium constant": exp_of(
                log(1.79e4 / 2.57e16), (198_464.0 - 87_090.0) / 8.314, unit="bar^-2"
            ),
            "may differ from Gibbs by": "100 %",
            "heat may differ by": "8 kJ/mol",
        },
        "floor": {"NH3": "0.001 %"},
        "source": "Morud and Skogestad (1998), from memory",
    }


METHANOL = gas("CO", "CO2", "H2", "H2O", "CH3OH", "Ar")


def adsorbed(power: float) -> list[Tree]:
    """(1 + 3453.38 pH2O/pH2 + sqrt(K_H2 pH2) + K_H2O pH2O)^power."""
    terms = [
        1,
        {"constant": 3453.38, "orders": {"H2O": 1, "H2": -1}},
        {"constant": exp_of(log(0.499), 17_197.0 / 8.314, unit="bar^-0.5"), "orders": {"H2": 0.5}},
        {"constant": exp_of(log(6.62e-11), 124_119.0 / 8.314, unit="1/bar"), "orders": {"H2O": 1}},
    ]
    return [{"power": power, "terms": terms}]


TEN = log(10.0)
LOG10_K1 = (-10.592, 3_066.0)
LOG10_K3 = (2.029, -2_073.0)
"""log10 K of methanol from CO2 (bar^-2) and of the reverse shift: a + b/T (Graaf et al. 1986)."""

FROM_CO2: Tree = {
    "equation": "CO2 + 3 H2 <=> CH3OH + H2O",
    "rate per": "catalyst mass",
    "driven by": "partial pressure",
    "orders": {"CO2": 1, "H2": 1},
    "constant": exp_of(log(1.07), 36_696.0 / 8.314, unit="mol/(kg s bar^2)"),
    "slowed by": adsorbed(3),
    "backward": {
        "equilibrium constant": exp_of(TEN * LOG10_K1[0], TEN * LOG10_K1[1], unit="bar^-2"),
        "may differ from Gibbs by": "20 %",
    },
    "valid": {"temperature": "180 degC to 280 degC"},
    "source": "Vanden Bussche and Froment (1996), Graaf et al. (1986), from memory",
}

REVERSE_SHIFT: Tree = {
    "equation": "CO2 + H2 <=> CO + H2O",
    "rate per": "catalyst mass",
    "driven by": "partial pressure",
    "orders": {"CO2": 1},
    "constant": exp_of(log(1.22e10), -94_765.0 / 8.314, unit="mol/(kg s bar)"),
    "slowed by": adsorbed(1),
    "backward": {"equilibrium constant": exp_of(TEN * LOG10_K3[0], TEN * LOG10_K3[1])},
    "valid": {"temperature": "180 degC to 280 degC"},
    "source": "Vanden Bussche and Froment (1996), Graaf et al. (1986), from memory",
}
"""Vanden Bussche and Froment, J. Catal. 161 (1996) 1, with Graaf et al. (1986) for equilibrium.

r_MeOH = k_M pCO2 pH2 [1 - pH2O pMeOH/(K1 pH2^3 pCO2)]/D^3,
r_RWGS = k_W pCO2 [1 - pH2O pCO/(K3 pCO2 pH2)]/D, mol/(kg s), p in bar.
"""

LAWS: dict[str, tuple[Tree, Tree, Tree]] = {
    "Eklund": (SO2, {"oxidation": EKLUND}, {"SO2": "9 %", "O2": "11 %", "SO3": "1 %", "N2": "rest"}),
    "Collina": (SO2, {"oxidation": COLLINA}, {"SO2": "8 %", "O2": "11 %", "SO3": "1 %", "N2": "rest"}),
    "Temkin": (NH3, {"synthesis": temkin()}, {"N2": "22 %", "H2": "66 %", "NH3": "4 %", "Ar": "rest"}),
    "Temkin, alpha 0.7": (
        NH3,
        {"synthesis": temkin(0.7)},
        {"N2": "22 %", "H2": "66 %", "NH3": "4 %", "Ar": "rest"},
    ),
    "methanol": (
        METHANOL,
        {"from CO2": FROM_CO2, "reverse shift": REVERSE_SHIFT},
        {"CO": "4 %", "CO2": "3 %", "H2": "82 %", "Ar": "rest"},
    ),
}
"""By name: species, reactions, and a feed that goes with them."""
