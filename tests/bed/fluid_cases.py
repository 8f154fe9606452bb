"""Cases whose stream is no ideal gas: ammonia, a dense liquid, a plain liquid, methanol with pores."""

from __future__ import annotations

from tests.bed.build import HEAD, Tree

GEOMETRY: Tree = {
    "diameter": "1.5 m",
    "bulk density": "800 kg/m^3",
    "void fraction": "40 %",
    "equivalent size": "3 mm",
}


def free(now: float, low: float, high: float, unit: str = "") -> Tree:
    return {"now": f"{now} {unit}".strip(), "from": f"{low} {unit}".strip(), "to": f"{high} {unit}".strip()}


def limits(*names: str) -> Tree:
    """Limits that never bind, so that their quantities are evaluated with derivatives."""
    units = {"temperature": "0 K", "margin": "0 K", "pressure": "0 bar(a)", "removed": "-1e6 MW"}
    return {
        name: {
            "of": name,
            "at least": units.get(name.split()[-1], "0 kmol/h" if " flow of " in name else "-900 K"),
        }
        for name in names
    }


def ammonia(equation: str = "Peng-Robinson 1976", k: Tree | None = None) -> Tree:
    """Two beds with a cold shot and priced cooling; Temkin's law in fugacities, invented constants."""
    shares = {"N2": "22 %", "H2": "66 %", "NH3": "3 %", "CH4": "rest"}
    critical = {"temperature": "405.4 K", "pressure": "113.33 bar(a)", "acentric factor": 0.256}
    return {
        **HEAD,
        "species": {
            **{name: {"gas data": name} for name in ("N2", "H2", "CH4")},
            "NH3": {"gas data": "NH3", "critical data": critical},
        },
        "fluid": {
            "density": equation,
            "phase": "vapour",
            "viscosity": "2.6e-5 Pa s",
            "binary parameters": k if k is not None else {"N2/NH3": 0.2, "H2/NH3": 0.09},
        },
        "reactions": {
            "synthesis": {
                "equation": "N2 + 3 H2 <=> 2 NH3",
                "rate per": "catalyst mass",
                "driven by": "fugacity",
                "orders": {"N2": 1, "H2": 1.5, "NH3": -1},
                "constant": {
                    "at": "450 degC",
                    "is": "2e-5 kmol/(kg h bar^1.5)",
                    "activation energy": "87 kJ/mol",
                },
                "floor": {"NH3": "0.1 %"},
            }
        },
        "feeds": {
            "main": {
                "flow": free(8000, 6000, 9000, "kmol/h"),
                "temperature": free(340, 320, 360, "degC"),
                "pressure": "190 bar(a)",
                "composition": shares,
            },
            "shot": {
                "flow": free(2500, 1000, 4000, "kmol/h"),
                "temperature": "150 degC",
                "pressure": "192 bar(a)",
                "composition": shares,
            },
        },
        "train": [
            {
                "entry": [
                    {"take": "main"},
                    {"heat": {"holds": "bed 1.inlet temperature", "heat from": "unpriced"}},
                ]
            },
            {
                "bed 1": {
                    "catalyst": free(5, 3, 9, "t"),
                    "inlet pressure": free(186, 150, 200, "bar(a)"),
                    "inlet temperature": free(372, 350, 420, "degC"),
                }
            },
            {"gap 1": [{"inject": "shot"}]},
            {"bed 2": {"catalyst": "9 t"}},
            {"effluent": [{"cool": {"to": free(190, 150, 220, "degC"), "heat to": "every cooling level"}}]},
        ],
        "every bed": GEOMETRY,
        "heat levels": {
            "minimum approach": "15 K",
            "steam": {"cools down to": "240 degC", "earns": "19 EUR/MWh"},
            "water": {"cools down to": "60 degC", "costs": "4 EUR/MWh"},
        },
        "limits": limits(
            "bed 1.exit temperature",
            "bed 2.exit temperature",
            "bed 2.inlet temperature",
            "bed 2.exit flow of NH3",
            "bed 2.exit pressure",
            "bed 1.approach to equilibrium of synthesis",
            "bed 2.exit dew point margin",
            "effluent.dew point margin",
            "bed 1.peak temperature",
        ),
    }


def dense() -> Tree:
    """Alkylation in a dense liquid under a cubic equation, with a cold injection; invented constants."""
    return {
        **HEAD,
        "species": {
            "benzene": {"gas data": "C6H6"},
            "ethylene": {"gas data": "C2H4"},
            "ethylbenzene": {"gas data": "C8H10,ethylbenz"},
        },
        "fluid": {"density": "Soave 1972", "phase": "liquid", "viscosity": "2e-4 Pa s"},
        "reactions": {
            "alkylation": {
                "equation": "benzene + ethylene => ethylbenzene",
                "rate per": "catalyst mass",
                "driven by": "concentration",
                "constant": {
                    "at": "200 degC",
                    "is": "2.5e-2 m^6/(kmol kg h)",
                    "activation energy": "70 kJ/mol",
                },
            }
        },
        "feeds": {
            "benzene": {
                "flow": free(600, 500, 700, "kmol/h"),
                "temperature": "190 degC",
                "pressure": "42 bar(a)",
                "composition": {"benzene": "100 %"},
            },
            "ethylene": {
                "flow": free(60, 40, 80, "kmol/h"),
                "temperature": "60 degC",
                "pressure": "60 bar(a)",
                "phase": "vapour",
                "composition": {"ethylene": "100 %"},
            },
        },
        "train": [
            {"entry": [{"take": "benzene"}, {"inject": "ethylene"}]},
            {"bed 1": {"catalyst": free(3, 2, 5, "t"), "inlet pressure": free(40, 38, 45, "bar(a)")}},
            {"effluent": []},
        ],
        "every bed": {**GEOMETRY, "equivalent size": "1 mm"},
        "prices": {"catalyst": {"of": "train.catalyst", "costs": "1 EUR/(t h)"}},
        "limits": limits(
            "bed 1.inlet temperature",
            "bed 1.exit temperature",
            "bed 1.exit flow of ethylene",
            "bed 1.exit pressure",
            "bed 1.inlet bubble point margin",
            "bed 1.exit bubble point margin",
        ),
    }


def liquid_species(H: float, S: float, cp: float, rho: float, formula: str) -> Tree:
    return {
        "formula": formula,
        "enthalpy of formation": f"{H} kJ/mol",
        "entropy": f"{S} J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {"powers of T": [f"{cp} J/(mol K)", "0.1 J/(mol K^2)"]},
        "density": {"powers of T": [f"{rho} kg/m^3", "-0.9 kg/(m^3 K)", "-1e-4 kg/(m^3 K^2)"]},
    }


def liquid(driver: str = "concentration") -> Tree:
    """A reversible addition in a liquid of given densities; all numbers invented."""
    unit = "m^6/(kmol kg h)" if driver == "concentration" else "kmol/(kg h)"
    size = 1.5e-4 if driver == "concentration" else 1.2e-2
    return {
        **HEAD,
        "species": {
            "A": liquid_species(-50.0, 250.0, 120.0, 1150.0, "C6H6"),
            "B": liquid_species(20.0, 180.0, 80.0, 850.0, "C2H4"),
            "C": liquid_species(-75.0, 345.0, 170.0, 1100.0, "C8H10"),
        },
        "fluid": {"density": "liquid", "viscosity": "3e-4 Pa s"},
        "reactions": {
            "addition": {
                "equation": "A + B <=> C",
                "rate per": "catalyst mass",
                "driven by": driver,
                "constant": {"at": "150 degC", "is": f"{size} {unit}", "activation energy": "60 kJ/mol"},
                "slowed by": [
                    {
                        "power": 1,
                        "terms": [
                            1,
                            {
                                "constant": "0.2 m^3/kmol" if driver == "concentration" else "0.5",
                                "orders": {"C": 1},
                            },
                        ],
                    }
                ],
                "effectiveness": {
                    "Thiele": {
                        "size": "1 mm",
                        "diffusivity": "3e-9 m^2/s",
                        "key species": "B",
                        "shape": "sphere",
                        "particle density": "1100 kg/m^3",
                    }
                },
            }
        },
        "feeds": {
            "mix": {
                "flow": free(300, 200, 400, "kmol/h"),
                "temperature": free(150, 140, 160, "degC"),
                "composition": {"A": "80 %", "B": "18 %", "C": "rest"},
            }
        },
        "train": [
            {"entry": [{"take": "mix"}]},
            {"bed 1": {"catalyst": free(1.5, 1, 3, "t"), "inlet pressure": free(30, 25, 35, "bar(a)")}},
            {"gap 1": [{"cool": {"heat removed": free(0.4, 0.1, 0.8, "MW"), "heat to": "unpriced"}}]},
            {"bed 2": {"catalyst": "2 t"}},
            {"effluent": []},
        ],
        "every bed": {**GEOMETRY, "equivalent size": "1 mm"},
        "prices": {"catalyst": {"of": "train.catalyst", "costs": "1 EUR/(t h)"}},
        "limits": limits(
            "bed 1.exit temperature",
            "bed 2.exit temperature",
            "bed 2.exit flow of B",
            "bed 2.exit pressure",
            "bed 1.approach to equilibrium of addition",
        ),
    }


def methanol() -> Tree:
    """CO2 hydrogenation in a cubic equation by partial pressures, with a K of its own and pores; invented."""
    water = {"temperature": "647.1 K", "pressure": "220.64 bar(a)", "acentric factor": 0.344}
    K = {"exp of": {"a": -23.5, "b": "7300 K"}, "in": "bar^-2"}
    return {
        **HEAD,
        "species": {
            **{name: {"gas data": name} for name in ("CO2", "H2")},
            "CH3OH": {
                "gas data": "CH3OH",
                "critical data": {
                    "temperature": "513 K",
                    "pressure": "80.1 bar(a)",
                    "acentric factor": 0.556,
                },
            },
            "H2O": {"gas data": "H2O", "critical data": water},
        },
        "fluid": {"density": "Peng-Robinson 1978", "phase": "vapour", "viscosity": "2e-5 Pa s"},
        "reactions": {
            "synthesis": {
                "equation": "CO2 + 3 H2 <=> CH3OH + H2O",
                "rate per": "catalyst mass",
                "driven by": "partial pressure",
                "orders": {"CO2": 1, "H2": 1},
                "constant": {
                    "at": "230 degC",
                    "is": "4e-5 kmol/(kg h bar^2)",
                    "activation energy": "60 kJ/mol",
                },
                "backward": {
                    "equilibrium constant": K,
                    "may differ from Gibbs by": "300 %",
                    "heat may differ by": "30 kJ/mol",
                },
                "slowed by": [
                    {"power": 2, "terms": [1, {"constant": "0.3 1/bar", "orders": {"H2O": 1}}]},
                ],
                "effectiveness": {
                    "Thiele": {
                        "size": "2 mm",
                        "diffusivity": "3e-7 m^2/s",
                        "key species": "CO2",
                        "shape": "slab",
                        "particle density": "1700 kg/m^3",
                    }
                },
            }
        },
        "feeds": {
            "gas": {
                "flow": free(5000, 4000, 6000, "kmol/h"),
                "temperature": free(235, 225, 245, "degC"),
                "pressure": "76 bar(a)",
                "composition": {"CO2": "20 %", "H2": "78 %", "CH3OH": "1 %", "H2O": "rest"},
            }
        },
        "train": [
            {"entry": [{"take": "gas"}]},
            {"bed 1": {"catalyst": free(20, 15, 25, "t"), "inlet pressure": free(74, 70, 80, "bar(a)")}},
            {"effluent": []},
        ],
        "every bed": GEOMETRY,
        "prices": {"catalyst": {"of": "train.catalyst", "costs": "1 EUR/(t h)"}},
        "limits": limits(
            "bed 1.exit temperature",
            "bed 1.exit flow of CH3OH",
            "bed 1.exit pressure",
            "bed 1.approach to equilibrium of synthesis",
            "bed 1.exit dew point margin",
        ),
    }


CASES = {
    "ammonia": ammonia,
    "dense liquid": dense,
    "liquid by concentration": liquid,
    "liquid by mole fraction": lambda: liquid("mole fraction"),
    "methanol with pores": methanol,
}
