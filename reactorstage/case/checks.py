"""What must agree between the parts of a case: names, sums, units of rate constants and prices, bounds.

Every function takes the case as written and reports to `Findings`. Values that could not be read stand in
as NaN, empty texts or None, and are left alone: each comparison is written so that NaN reports nothing.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from reactorstage.case.build import extras
from reactorstage.case.checks_chemistry import check_reaction, check_species
from reactorstage.case.checks_feeds import check_feeds
from reactorstage.case.checks_fluid import check_fluid
from reactorstage.case.checks_train import check_train
from reactorstage.case.fields import Raw
from reactorstage.case.marks import TreePath
from reactorstage.case.units import (
    UnitProblem,
    check_unit,
    price_to_si,
    shown,
    split_number,
)
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import (
    EVERY_BED,
    EVERY_COOLING_LEVEL,
    EVERY_GAP,
    EVERY_HEATING_LEVEL,
    UNPRICED,
    CaseWritten,
    Level,
    LimitException,
    LimitWritten,
    Price,
)
from reactorstage.case.written_chemistry import Reaction

OWN_MONEY = ("total", "heat", "soft limits")


def check(case: CaseWritten, folder: Path, findings: Findings) -> None:
    """Every check, on whatever could be read; `folder` is where data files are looked up."""
    check_names(case, findings)
    for name, species in case.species.items():
        check_species(name, species, folder, findings)
    reactions: dict[str, Reaction] = extras(case.reactions)
    if not reactions and not findings.items:
        findings.add(("reactions",), "no reaction stands here", "give at least one, by name")
    for name, reaction in reactions.items():
        check_reaction(name, reaction, case, findings)
    check_fluid(case, reactions, findings)
    check_feeds(case, findings)
    check_train(case, reactions, findings)
    check_levels(case, findings)
    owners = owners_of(case, reactions)
    check_quantity(case.aim.quantity, ("aim",), [o for o in owners if not o.startswith("every ")], findings)
    for label, price in case.prices.items():
        check_price(label, price, case, owners, findings)
    for label, limit in case.limits.items():
        check_limit(label, limit, case, owners, findings)


def owners_of(case: CaseWritten, reactions: Mapping[str, Reaction]) -> list[str]:
    """Everything that may stand before the dot of a quantity's name."""
    sections = [owner for section in case.train for owner in section]
    levels = extras(case.heat_levels) if case.heat_levels else {}
    return [
        *dict.fromkeys(["entry", *sections, "effluent"]),
        EVERY_BED,
        EVERY_GAP,
        "train",
        "money",
        *(f"feed {name}" for name in case.feeds),
        *(f"exchanger {name}" for name in case.exchangers),
        *(f"recycle {name}" for name in case.recycles),
        *(f"level {name}" for name in levels),
        *(f"reaction {name}" for name in reactions),
    ]


def check_quantity(name: str, path: TreePath, owners: Sequence[str], findings: Findings) -> None:
    """The owner of a quantity must be there; whether it has such a quantity is known higher up."""
    if not name or any(name.startswith(f"{owner}.") and name[len(owner) + 1 :].strip() for owner in owners):
        return
    owner, dot, _ = name.partition(".")
    if not dot or owner in owners:
        findings.add(
            path, f"{shown(name)} is not the name of a quantity", "write owner.quantity, as in train.catalyst"
        )
    elif not any(other.startswith("bed ") for other in owners):
        return  # the train itself could not be read
    else:
        findings.add(path, f"there is no {shown(owner)} in this case", one_of(owner, owners))


def check_names(case: CaseWritten, findings: Findings) -> None:
    """Names that the command line could not tell apart, or that would be read as something else."""
    levels = list(extras(case.heat_levels)) if case.heat_levels else []
    groups: dict[str, Iterable[str]] = {
        "species": case.species,
        "reactions": extras(case.reactions),
        "feeds": case.feeds,
        "heat levels": levels,
        "prices": case.prices,
        "limits": case.limits,
    }
    for group, names in groups.items():
        seen: dict[str, str] = {}
        for name in names:
            first = seen.setdefault(plain_name(name), name)
            if first != name:
                message = f"{shown(name)} and {shown(first)} differ only in hyphens, spaces or capitals"
                findings.add((group, name), message, "choose clearly different names", True)
    for name in case.species:
        if (
            not re.fullmatch(r"(?![0-9.]+\s)[^\s/+<>=]+( [^\s/+<>=]+)*", name)
            or " from " in name
            or name == "rest"
        ):
            hint = (
                "use words without / + < > =, without ` from `, that do not begin with a number and a space"
            )
            findings.add(("species", name), f"{shown(name)} cannot be the name of a species", hint, True)
    for name in levels:
        if name in (EVERY_COOLING_LEVEL, EVERY_HEATING_LEVEL, UNPRICED):
            findings.add(
                ("heat levels", name), f"{shown(name)} has a meaning of its own", "choose another name", True
            )


def plain_name(name: str) -> str:
    """A name as the command line compares it: lower case, hyphens and runs of spaces as one space."""
    return re.sub(r"[\s-]+", " ", name).strip().lower()


def check_levels(case: CaseWritten, findings: Findings) -> None:
    levels: dict[str, Level] = extras(case.heat_levels) if case.heat_levels else {}
    for name, level in levels.items():
        path: TreePath = ("heat levels", name)
        one_of_two(level, ("heats up to", "cools down to"), path, name, findings)
        one_of_two(level, ("costs", "earns"), path, name, findings)
        for key in ("costs", "earns"):
            raw: Raw | None = getattr(level, key)
            if raw and raw.text and case.currency:
                try:
                    price_to_si(raw.text, "power", case.currency, case.hours_per_year)
                except UnitProblem as found:
                    findings.add((*path, key), found.message, found.hint)


def one_of_two(model: object, keys: tuple[str, str], path: TreePath, name: str, findings: Findings) -> None:
    given = [key for key in keys if getattr(model, key.replace(" ", "_")) is not None]
    if len(given) == 2:
        findings.add(
            (*path, keys[1]), f"{name} has both `{keys[0]}` and `{keys[1]}`", "keep one of them", True
        )
    elif not given:
        findings.add(path, f"{name} has neither `{keys[0]}` nor `{keys[1]}`", "give one of them", True)


def check_price(
    label: str, price: Price, case: CaseWritten, owners: Sequence[str], findings: Findings
) -> None:
    path: TreePath = ("prices", label)
    one_of_two(price, ("costs", "earns"), path, label, findings)
    check_quantity(price.of, (*path, "of"), owners, findings)
    if label in OWN_MONEY or label.startswith("heat of "):
        findings.add(
            path, f"money.{label} has a meaning of its own", "choose another label for this price", True
        )
    for key in ("costs", "earns"):
        check_money(getattr(price, key), (*path, key), case, findings)


def check_money(raw: Raw | None, path: TreePath, case: CaseWritten, findings: Findings) -> None:
    """A price whose quantity is known only later must at least be money of this case."""
    if raw is None or not raw.text or not case.currency:
        return
    try:
        unit = check_unit(raw.text, case.currency, case.hours_per_year)
    except UnitProblem as found:
        findings.add(path, found.message, found.hint)
        return
    if unit is None or abs(unit.powers[-1] - 1.0) > 1e-9 or not any(unit.powers[:-1]):
        findings.add(
            path, f"{shown(raw.text)} is not money for something", f"write it like 62 {case.currency}/kmol"
        )


def check_limit(
    label: str, limit: LimitWritten, case: CaseWritten, owners: Sequence[str], findings: Findings
) -> None:
    path: TreePath = ("limits", label)
    check_quantity(limit.of, (*path, "of"), owners, findings)
    if limit.at_most is None and limit.at_least is None and limit.between is None and not limit.exceptions:
        findings.add(path, f"{label} has no bound", "give `at most`, `at least`, or `between: A and B`", True)
    check_bounds(limit, path, findings)
    check_money(limit.soft, (*path, "soft"), case, findings)
    for owner, exception in limit.exceptions.items():
        check_exception(limit, owner, exception, (*path, "except", owner), owners, findings)


def check_bounds(limit: LimitException, path: TreePath, findings: Findings) -> None:
    """Units that can be read, and a lower bound not above the upper one."""
    for key in ("at most", "at least", "keep away"):
        raw: Raw | None = getattr(limit, key.replace(" ", "_"))
        try:
            if raw and raw.text:
                check_unit(raw.text)
        except UnitProblem as found:
            findings.add((*path, key), found.message, found.hint)
    low, high = limit.at_least, limit.at_most
    if low and high and low.text and high.text:
        (a, unit_a), (b, unit_b) = split_number(low.text), split_number(high.text)
        if unit_a == unit_b and a > b:
            findings.add(
                (*path, "at least"), f"at least {low.text} lies above at most {high.text}", "swap them"
            )


def check_exception(
    limit: LimitWritten,
    owner: str,
    exception: LimitException,
    path: TreePath,
    owners: Sequence[str],
    findings: Findings,
) -> None:
    kind = next((k for k in ("bed", "gap") if limit.of.startswith(f"every {k}.")), "")
    if not kind:
        if limit.of:
            findings.add(
                path, "`except` belongs to a limit of `every bed.` or `every gap.`", "leave it out", True
            )
        return
    there = [other for other in owners if re.fullmatch(rf"{kind} \d+", other)]
    if owner not in there and there:
        findings.add(path, f"this limit has no {shown(owner)} to except", one_of(owner, there), True)
    if not exception.model_fields_set:
        findings.add(path, "the exception has no bound", "give `at most`, `at least` or `keep away`", True)
    check_bounds(exception, path, findings)
