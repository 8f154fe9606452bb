"""Checks of species and reactions: where data come from, names, and what the parts of a rate law ask for."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping
from functools import partial
from math import isfinite
from pathlib import Path

from reactorstage.case import law_units
from reactorstage.case.build import data_file
from reactorstage.case.marks import TreePath
from reactorstage.case.units import UnitProblem, shown
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import CaseWritten
from reactorstage.case.written_chemistry import REVERSIBLE, Reaction, Species, SpeciesData
from reactorstage.case.written_rates import Effectiveness, OwnEquilibrium, TemperatureForm

INLINE = ("formula", "enthalpy_of_formation", "entropy", "standard_pressure", "heat_capacity")


def check_species(name: str, species: Species, folder: Path, findings: Findings) -> None:
    """One source of data for a species, and files that are there."""
    path: TreePath = ("species", name)
    if species.isomers is None:
        check_data(name, species, path, folder, findings)
        return
    given = [key for key in ("gas_data", *INLINE) if getattr(species, key) is not None]
    if given:
        key = given[0].replace("_", " ")
        message = f"{name} has both `isomers` and `{key}`"
        findings.add((*path, key), message, "give the data of each isomer among the isomers", True)
    for i, isomer in enumerate(species.isomers):
        check_data(f"isomer {i + 1} of {name}", isomer, (*path, "isomers", i), folder, findings)


def check_data(name: str, species: SpeciesData, path: TreePath, folder: Path, findings: Findings) -> None:
    given = [key for key in INLINE if getattr(species, key) is not None]
    missing = [key.replace("_", " ") for key in INLINE if key not in given]
    if species.gas_data is not None and given:
        key = given[0].replace("_", " ")
        findings.add((*path, key), f"{name} has both `gas data` and `{key}`", "keep one source of data", True)
    elif species.gas_data is None and missing:
        hint = "give `gas data: NAME`" + (", or " + ", ".join(missing) if missing else "")
        what = f"{', '.join(missing)} missing" if given else "no data"
        findings.add(path, f"{name} has {what}" if not given else f"{what} in {name}", hint)
    file = data_file(species.gas_data or "")[0]
    if file and not (folder / file).is_file():
        hint = "the file is looked up in the folder of the case"
        findings.add((*path, "gas data"), f"there is no file {shown(file)}", hint)


def check_reaction(name: str, reaction: Reaction, case: CaseWritten, findings: Findings) -> None:
    """Names, forms and units of one reaction."""
    path: TreePath = ("reactions", name)
    for where, names in named_species(reaction):
        check_known(names, (*path, *where), case, findings)
    for where, species in species_of_effectiveness(reaction.effectiveness):
        if case.species and species not in case.species:
            hint = one_of(species, list(case.species))
            findings.add((*path, *where), f"there is no species {shown(species)}", hint)
    check_backward(name, reaction, path, case.species, findings)
    if check_form(reaction.constant, (*path, "constant"), findings):
        check_constant(reaction, path, case.species, findings)
    check_slowing(reaction, path, case.species, findings)
    if reaction.effectiveness is not None:
        check_effectiveness(reaction.effectiveness, (*path, "effectiveness"), findings)


def named_species(reaction: Reaction) -> list[tuple[TreePath, Iterable[str]]]:
    """Every mapping by species in a reaction: its place and its keys."""
    found: list[tuple[TreePath, Iterable[str]]] = [
        (("orders",), reaction.orders or {}),
        (("floor",), reaction.floor),
    ]
    for f, factor in enumerate(reaction.slowed_by or ()):
        for t, term in enumerate(factor.terms):
            found.append((("slowed by", f, "terms", t, "orders"), term.orders))
    return found


def species_of_effectiveness(given: Effectiveness | None) -> list[tuple[TreePath, str]]:
    """Every species that an effectiveness names as a value: its place and its name."""
    found: list[tuple[TreePath, str]] = []
    if given is not None and given.Thiele is not None:
        found.append((("effectiveness", "Thiele", "key species"), given.Thiele.key_species))
    if given is not None and given.conversion is not None:
        where: TreePath = ("effectiveness", "conversion")
        found += [((*where, "of"), given.conversion.of), ((*where, "into"), given.conversion.into)]
    return found


def check_known(names: Iterable[str], path: TreePath, case: CaseWritten, findings: Findings) -> None:
    for species in names:
        if case.species and species not in case.species:
            hint = one_of(species, list(case.species))
            findings.add((*path, species), f"there is no species {shown(species)}", hint, True)


def check_backward(
    name: str, reaction: Reaction, path: TreePath, species: Iterable[str], findings: Findings
) -> None:
    """No backward rate of an irreversible equation; form and unit of an equilibrium constant."""
    irreversible = bool(reaction.equation) and REVERSIBLE not in reaction.equation
    if reaction.backward and irreversible:
        message = f"{name} is irreversible, so it has no backward rate"
        hint = f"write {REVERSIBLE} in the equation, or leave `backward` out"
        findings.add((*path, "backward"), message, hint)
    if "power_of_K" in reaction.model_fields_set and irreversible:
        message = f"{name} is irreversible, so no K has a power"
        hint = f"write {REVERSIBLE} in the equation, or leave `power of K` out"
        findings.add((*path, "power of K"), message, hint)
    if not isinstance(reaction.backward, OwnEquilibrium):
        return
    given, where = reaction.backward.equilibrium_constant, (*path, "backward", "equilibrium constant")
    counts = sides(reaction.equation, species)
    if check_form(given, where, findings) and counts is not None:
        change = counts[1] - counts[0]
        with_unit(given, where, findings, lambda: law_units.equilibrium_constant(given, change))


def check_form(given: TemperatureForm, path: TreePath, findings: Findings) -> bool:
    """A constant is given in exactly one way; False when it could not be read or is not."""
    energy, before = f"`{given.energy_key}`", len(findings.items)
    if given.is_ is None and given.exp_of is None:
        hint = "write `is: VALUE`, or `exp of: {a: ..., b: ... K}` with `in: UNIT`"
        findings.add(path, "the constant has no value", hint, True)
    elif given.is_ is not None and given.exp_of is not None:
        findings.add((*path, "exp of"), "`is` and `exp of` are given together", "keep one of them", True)
    elif given.exp_of is not None:
        for key, value in (("at", given.at), (given.energy_key, given.energy)):
            if value is not None:
                message = f"`{key}` has no meaning beside `exp of`"
                findings.add((*path, key), message, "leave it out", True)
    elif given.in_ is not None:
        findings.add(
            (*path, "in"), "`in` has no meaning beside `is`", "write the unit behind the value", True
        )
    elif given.at is not None and given.energy is None:
        article = "an" if energy[1] in "aeiou" else "a"
        message = f"`at` has no meaning without {article} {given.energy_key}"
        findings.add((*path, "at"), message, f"add {energy}, or leave `at` out")
    readable = given.exp_of is not None or bool(given.is_ and given.is_.text)
    return readable and len(findings.items) == before


def check_constant(reaction: Reaction, path: TreePath, species: Iterable[str], findings: Findings) -> None:
    """The unit of the rate constant against basis, driver and orders."""
    orders, given = order_sum(reaction, species), reaction.constant
    per, driver = reaction.rate_per, reaction.driven_by
    if orders is not None and per and driver:
        where = (*path, "constant")
        with_unit(given, where, findings, lambda: law_units.rate_constant(given, per, driver, orders))


def check_slowing(reaction: Reaction, path: TreePath, species: Iterable[str], findings: Findings) -> None:
    """Powers, forms and units of what stands below the line."""
    driver = reaction.driven_by
    for f, factor in enumerate(reaction.slowed_by or ()):
        where: TreePath = (*path, "slowed by", f)
        if factor.power == 0.0:
            findings.add(
                (*where, "power"), "a factor to the power 0 is 1", "give it a power, or leave it out"
            )
        for t, term in enumerate(factor.terms):
            at = (*where, "terms", t, "constant")
            given, total = term.constant, total_order(term.orders, species)
            if check_form(given, at, findings) and driver and total is not None:
                with_unit(given, at, findings, partial(law_units.term_constant, given, driver, total))


def with_unit(given: TemperatureForm, path: TreePath, findings: Findings, read: Callable[[], object]) -> None:
    """Put a complaint of `read` where the unit of the constant stands."""
    try:
        read()
    except UnitProblem as found:
        key = "is" if given.exp_of is None else "in"
        findings.add((*path, key), found.message, found.hint)


def check_effectiveness(given: Effectiveness, path: TreePath, findings: Findings) -> None:
    """One way of saying it."""
    ways = {"factor": given.factor, "powers of T": given.powers_of_T, "Thiele": given.Thiele}
    found = [key for key, value in ways.items() if value is not None]
    if len(found) != 1:
        what = "nothing says how large it is" if not found else f"{' and '.join(found)} are given together"
        findings.add(path, what, f"give exactly one of {', '.join(ways)}", True)
    by_conversion = given.powers_of_conversion
    if by_conversion is not None and given.powers_of_T is None:
        message = "`powers of conversion` stands beside `powers of T`"
        findings.add((*path, "powers of conversion"), message, "add `powers of T: [...]`", True)
    if (by_conversion is None) != (given.conversion is None):
        there, other = "powers of conversion", "conversion"
        if by_conversion is None:
            there, other = other, there
        hint = "write both or none, as in conversion: {of: nitrogen, into: ammonia}"
        findings.add((*path, there), f"`{there}` needs `{other}`", hint, True)


def order_sum(reaction: Reaction, species: Iterable[str]) -> float | None:
    """Sum of the forward orders; None when they or the equation cannot be read here (others say why)."""
    if reaction.orders is not None:
        return total_order(reaction.orders, species)
    counts = sides(reaction.equation, species)
    return None if counts is None else counts[0]


def total_order(orders: Mapping[str, float], species: Iterable[str]) -> float | None:
    """Sum of orders; None where one is unreadable or that of an unknown species, which is said elsewhere."""
    total = sum(orders.values())
    return total if isfinite(total) and all(name in species for name in orders) else None


def sides(equation: str, species: Iterable[str]) -> tuple[float, float] | None:
    """Molecules on both sides of an equation; None when it cannot be read here."""
    left, arrow, right = re.sub(REVERSIBLE, "=>", equation).partition("=>")
    counts = [_molecules(side, species) for side in (left, right)]
    if not arrow or counts[0] is None or counts[1] is None:
        return None
    return counts[0], counts[1]


def _molecules(side: str, species: Iterable[str]) -> float | None:
    total = 0.0
    for text in side.split(" + "):
        term = re.fullmatch(r"(?:([0-9.]+)(?:/([0-9.]+))?\s+)?(\S.*)", text.strip())
        if term is None or term[3] not in species:
            return None
        try:
            total += float(term[1] or 1.0) / float(term[2] or 1.0)
        except (ValueError, ZeroDivisionError):
            return None
    return total
