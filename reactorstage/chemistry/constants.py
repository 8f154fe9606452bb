"""Constants that every property of this floor is built on."""

from __future__ import annotations

R_GAS = 8.31446261815324
"""Molar gas constant, J/(mol K); exact since the SI of 2019 (CODATA 2018), the same as Cantera's."""

P_STANDARD = 1e5
"""Standard pressure of every entropy and equilibrium constant inside the program, Pa."""

T_STANDARD = 298.15
"""Temperature of tabulated formation enthalpies and standard entropies, K."""
