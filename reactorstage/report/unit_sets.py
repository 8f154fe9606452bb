"""Sets of display units: each result is shown in one of them throughout.

The trade set is that of `reactorstage.case.units`; the others say only where they differ. Money stays per
hour in every set, since prices are agreed per hour.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

ATMOSPHERE_BAR = 1.01325
TRADE = "trade"


@dataclass(frozen=True)
class Scale:
    """How values of a kind are shown: value_SI / scale - offset, in `unit`.

    digits: decimals more (or fewer, negative) than the trade unit needs for the same accuracy.
    """

    unit: str
    scale: float = 1.0
    offset: float = 0.0
    digits: int = 0


@dataclass(frozen=True)
class UnitSet:
    """A consistent set: its name, what is in it in words, and where it differs from the trade set."""

    name: str
    words: str
    scales: Mapping[str, Scale] = field(default_factory=dict)


_POUND, _FOOT, _BTU, _PSI, _HOUR = 0.45359237, 0.3048, 1055.05585262, 6894.757293168, 3600.0
"""International pound, foot and Btu, psi in Pa (NIST SP 811, 2008, appendix B)."""

RATE = "rate per catalyst"
RATE_SCALE = Scale("kmol/(t h)", 1.0 / _HOUR)

UNIT_SETS: dict[str, UnitSet] = {
    one.name: one
    for one in (
        UnitSet(TRADE, "degC, bar(a), kmol/h, t/h, t, MW"),
        UnitSet(
            "gauge",
            "as trade, with bar(g) and GJ/h",
            {
                "pressure": Scale("bar(g)", 1e5, ATMOSPHERE_BAR),
                "power": Scale("GJ/h", 1e9 / _HOUR),
            },
        ),
        UnitSet(
            "SI",
            "K, kPa(a), mol/s, kg/s, kg, kW",
            {
                "temperature": Scale("K"),
                "pressure": Scale("kPa(a)", 1e3, digits=-1),
                "pressure difference": Scale("kPa", 1e3, digits=-1),
                "molar flow": Scale("mol/s", digits=1),
                "mass flow": Scale("kg/s", digits=1),
                "mass": Scale("kg", digits=-2),
                "power": Scale("kW", 1e3, digits=-2),
                RATE: Scale("mol/(kg s)"),
            },
        ),
        UnitSet(
            "US",
            "degF, psi(a), lbmol/h, lb/h, lb, million Btu/h",
            {
                "temperature": Scale("degF", 5.0 / 9.0, 459.67),
                "temperature difference": Scale("R", 5.0 / 9.0),
                "pressure": Scale("psi(a)", _PSI, digits=-1),
                "pressure difference": Scale("psi", _PSI, digits=-1),
                "molar flow": Scale("lbmol/h", 1e3 * _POUND / _HOUR),
                "mass flow": Scale("lb/h", _POUND / _HOUR, digits=-2),
                "mass": Scale("lb", _POUND, digits=-2),
                "volume": Scale("ft^3", _FOOT**3, digits=-1),
                "length": Scale("ft", _FOOT),
                "density": Scale("lb/ft^3", _POUND / _FOOT**3, digits=1),
                "power": Scale("10^6 Btu/h", 1e6 * _BTU / _HOUR),
                "molar energy": Scale("Btu/lbmol", _BTU / (1e3 * _POUND), digits=-1),
                "molar entropy": Scale("Btu/(lbmol R)", 1.8 * _BTU / (1e3 * _POUND)),
                RATE: Scale("lbmol/(1000 lb h)", 1.0 / _HOUR),
            },
        ),
    )
}
