"""Money: prices on quantities and the heat ladder, as linear forms of the base vector (cost positive)."""

from __future__ import annotations

from typing import TYPE_CHECKING

from reactorstage.case import units
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.forms import Form, Linear, total
from reactorstage.train.heat import Ladder
from reactorstage.train.limits import names_of
from reactorstage.train.quantities import Catalogue

if TYPE_CHECKING:
    from reactorstage.case.model import Case

RESERVED = ("total", "heat", "soft limits")


def money_forms(case: Case, catalogue: Catalogue, ladder: Ladder, soft: Linear) -> dict[str, Form]:
    """Money terms by name: each price label, heat of each place, heat, soft limits, total (per second)."""
    problems: list[Problem] = []
    terms = {label: _price(case, catalogue, label, problems) for label in case.prices}
    if problems:
        raise CaseProblems(problems)
    heat = {f"heat of {owner}": form for owner, form in ladder.cost.items()}
    sums = {"heat": total(list(heat.values()))} if heat else {}
    extra = {"soft limits": soft} if soft.terms else {}
    everything = total([*terms.values(), *sums.values(), *extra.values()])
    return {
        name: Form("money rate", form)
        for name, form in {**terms, **heat, **sums, **extra, "total": everything}.items()
    }


def _price(case: Case, catalogue: Catalogue, label: str, problems: list[Problem]) -> Linear:
    price = case.prices[label]
    if label in RESERVED or label.startswith("heat of "):
        problems.append(
            case.problem(
                ("prices", label), f"{label!r} is a name that money uses itself", "choose another label", True
            )
        )
        return Linear()
    sign, raw, key = (1.0, price.costs, "costs") if price.costs is not None else (-1.0, price.earns, "earns")
    assert raw is not None
    parts: list[Linear] = []
    for _, name in names_of(price.of, catalogue.layout):
        try:
            form = catalogue.find(name)
        except LookupError as error:
            problems.append(case.problem(("prices", label, "of"), str(error.args[0])))
            return Linear()
        if form.bottom is not None or form.absent:
            why = form.reason if form.absent else "it is a ratio, not an amount"
            problems.append(case.problem(("prices", label, "of"), f"{name} cannot be priced: {why}"))
            return Linear()
        try:
            per_unit = units.price_to_si(raw.text, form.kind, case.currency, case.hours_per_year)
        except units.UnitProblem as error:
            problems.append(case.problem(("prices", label, key), error.message, error.hint))
            return Linear()
        parts.append(form.top * (sign * per_unit))
    return total(parts)
