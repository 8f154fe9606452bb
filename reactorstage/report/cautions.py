"""What must stand beside results, so that nobody reads more into them than they say."""

from __future__ import annotations

from collections.abc import Sequence

STEADY = "Steady state: hot fronts can be hotter."
ADVICE = "Advice only; local codes and licensed practice stand above it."
SHORT = f"{STEADY} {ADVICE}"
PROFILE = (
    "Steady-state, one-dimensional plug-flow result. It does not show start-up, shutdown, regeneration, flow "
    "reversal, maldistribution, hot zones, local mixing at injection points, or transient temperature peaks, "
    "which can exceed every temperature given here. A sudden fall in feed temperature can raise the peak."
)
REACTIONS = (
    "Temperatures are adiabatic values for the reactions listed in the case. Reactions not listed "
    "(decomposition, polymerisation, hydrogenation of the product, methanation, reaction with oxygen, "
    "reaction of fresh or unreduced catalyst with the process fluid) can add heat."
)
BASIS = (
    "Not a basis by itself for relief sizing, trip settings, alarm limits or material selection; these need "
    "a competent hazard review (HAZOP/LOPA, IEC 61511) and the equipment's rated limits."
)
CHANGE = "Changes on a running unit go through the site's management of change."
DUTY = (
    "Kinetics, limits and prices are those of the case and are its owner's responsibility. Kinetics of the "
    "cases shipped with the tool are invented or from memory: never use them for a real unit."
)
FULL = (PROFILE, REACTIONS, BASIS, f"{ADVICE} {CHANGE}", DUTY)


def at_limits(held: Sequence[str]) -> list[str]:
    """What a setting right on its limits needs; nothing where none is at work."""
    if not held:
        return []
    return [
        f"This setting stands on {', '.join(held)}: instrument error alone can cross them. Give these limits "
        "a keep away that you can defend."
    ]


def substances(names: Sequence[str]) -> str:
    """Where to read about what flows."""
    return f"{', '.join(names)}: see the safety data of the substances."
