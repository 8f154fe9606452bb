"""Checks of the fluid: what an equation of state or a liquid asks of species, feeds and reactions."""

from __future__ import annotations

from collections.abc import Mapping

from reactorstage.case.units import shown
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import CaseWritten
from reactorstage.case.written_chemistry import REVERSIBLE, Reaction
from reactorstage.case.written_fluid import CUBIC, IDEAL_GAS, LIQUID, PAIR
from reactorstage.case.written_rates import OwnEquilibrium


def check_fluid(case: CaseWritten, reactions: Mapping[str, Reaction], findings: Findings) -> None:
    """Everything that hangs on `fluid: density`."""
    if case.fluid.density not in (IDEAL_GAS, LIQUID, *CUBIC):
        return
    if case.fluid.density in CUBIC:
        check_cubic(case, findings)
    else:
        for key in ("phase", "binary parameters"):
            if getattr(case.fluid, key.replace(" ", "_")):
                message = f"`{key}` has no meaning with density: {case.fluid.density}"
                findings.add(("fluid", key), message, "leave it out, or name a cubic equation of state", True)
        for name, feed in case.feeds.items():
            if feed.phase is not None:
                message = f"`phase` has no meaning with density: {case.fluid.density}"
                hint = "leave it out, or name a cubic equation of state in `fluid`"
                findings.add(("feeds", name, "phase"), message, hint, True)
    if case.fluid.density == LIQUID:
        for name, species in case.species.items():
            if species.density is None:
                hint = 'add `density: {powers of T: ["1100 kg/m^3", "-0.9 kg/(m^3 K)"]}`'
                findings.add(("species", name), f"the density of {name} as a liquid is missing", hint, True)
    for name, reaction in reactions.items():
        check_driver(name, reaction, case.fluid.density, findings)


def check_cubic(case: CaseWritten, findings: Findings) -> None:
    if case.fluid.phase is None:
        message = f"{case.fluid.density} needs the phase that flows through the beds"
        findings.add(("fluid",), message, "add `phase: vapour` or `phase: liquid`", True)
    for pair in case.fluid.binary_parameters:
        names, path = [name.strip() for name in pair.split(PAIR)], ("fluid", "binary parameters", pair)
        if len(names) != 2 or names[0] == names[1]:
            findings.add(path, f"{shown(pair)} is no pair of species", "write it as benzene/ethylene", True)
            continue
        for name in names:
            if name not in case.species:
                findings.add(
                    path, f"there is no species {shown(name)}", one_of(name, list(case.species)), True
                )
    for name, feed in case.feeds.items():
        if feed.pressure is None:
            message = f"the pressure of {name} is missing: enthalpy depends on it in a real gas"
            findings.add(("feeds", name), message, "add `pressure: VALUE bar(a)`", True)


def check_driver(name: str, reaction: Reaction, density: str, findings: Findings) -> None:
    """A driver that the fluid has; for a backward rate from Gibbs energies, one that says equilibrium."""
    path, driver = ("reactions", name, "driven by"), reaction.driven_by
    own = isinstance(reaction.backward, OwnEquilibrium)
    if driver == "fugacity" and density == IDEAL_GAS:
        message = "an ideal gas has no fugacities of its own: they are its partial pressures"
        findings.add(path, message, "write driven by: partial pressure")
    elif driver in ("fugacity", "partial pressure") and density == LIQUID:
        message = f"a liquid of given densities has no {driver}"
        findings.add(path, message, "write driven by: concentration or mole fraction")
    elif density in CUBIC and REVERSIBLE in reaction.equation and driver != "fugacity" and not own:
        message = f"{name} is driven by {driver}, which does not say where a real fluid is at equilibrium"
        hint = "write driven by: fugacity, or give `backward` an equilibrium constant of the law's own"
        findings.add(path, message, hint)
