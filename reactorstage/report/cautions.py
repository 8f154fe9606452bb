"""What must stand beside results, so that nobody reads more into them than they say."""

from __future__ import annotations

STEADY = "Steady state: hot fronts can be hotter."
ADVICE = "Advice only; local codes and licensed practice stand above it."
SHORT = f"{STEADY} {ADVICE}"
PROFILE = (
    "Steady-state, one-dimensional plug-flow result. It does not show start-up, shutdown, regeneration, flow "
    "reversal, maldistribution, hot zones, local mixing at injection points, or transient temperature peaks, "
    "which can exceed every temperature given here. A sudden fall in feed temperature can raise the peak."
)
REACTIONS = "Reactions that are not listed in the case can add heat."
BASIS = (
    "Not a basis by itself for relief sizing, trip settings, alarm limits or material selection; these need "
    "a competent hazard review and the equipment's rated limits."
)
CHANGE = "Changes on a running unit go through the site's management of change."
DUTY = "Kinetics, limits and prices are those of the case and are its owner's responsibility."
FULL = (PROFILE, REACTIONS, BASIS, f"{ADVICE} {CHANGE}", DUTY)
