"""Where a law would be singular without a species, and the smooth floor that keeps it finite.

A floored driver stands in for the driver of a species:

    a_floored = ( a + sqrt(a^2 + 4 f^2) )/2,   f = floor times the sum of all drivers,

which is f where the species is absent, a + f^2/a far above it, above zero everywhere and smooth. Only the
part of a law that needs it is taken of the floored driver. A reversible law is written with that part in
front of the driving force,

    a_floored^gamma [ a^(alpha - gamma) ... - a^(beta - gamma) ... / K^m ],   gamma = min(alpha, beta),

so that the rate is still zero exactly where Q = K. What an irreversible law consumes with an order n that is
not a whole number above zero is taken as a a_floored^(n - 1), zero where nothing is left; anything else, and
orders below the line, as a_floored^n. Whole orders of zero and above keep the driver itself, except in a sum
below the line of which no term stays when species are absent: there every floored species counts as floored.

A reactant that an irreversible law consumes with a broken order above zero may have a floor but needs none:
its rate is nowhere infinite, and comes to rest at zero by the smooth powers of `rate_law`.
"""

from __future__ import annotations

from collections.abc import Callable, Container, Mapping

from reactorstage.chemistry.law import Denominator, RateLaw, Term, backward_orders


def is_plain(n: float) -> bool:
    """Whether a power is a plain multiplication."""
    return n >= 0.0 and n == round(n)


def floored_part(law: RateLaw, name: str) -> float:
    """Power gamma of the floored driver of a species in front of the driving force; 0 when none is needed."""
    alpha, nu = law.orders.get(name, 0.0), law.stoichiometry.get(name, 0.0)
    if law.reversible:
        gamma = min(alpha, backward_orders(law).get(name, 0.0))
        return 0.0 if is_plain(gamma) else gamma
    if nu < 0.0:
        return 0.0 if is_plain(alpha) and alpha >= 1.0 else alpha - 1.0
    return 0.0 if is_plain(alpha) else alpha


Split = tuple[dict[str, float], dict[str, float]]
"""Powers of the drivers and of the floored drivers."""


def forward(law: RateLaw) -> Split:
    """Powers of the forward rate."""
    return _split(law.orders, law.floors, lambda name, n: floored_part(law, name))


def backward(law: RateLaw) -> Split:
    """Powers of the backward rate; nothing without one."""
    if not law.reversible:
        return {}, {}
    return _split(backward_orders(law), law.floors, lambda name, n: floored_part(law, name))


def below(law: RateLaw, factor: Denominator, orders: Mapping[str, float]) -> Split:
    """Powers of a term of a factor of the denominator."""
    empties = not stays(factor)
    return _split(orders, law.floors, lambda name, n: n if empties or not is_plain(n) else 0.0)


def stays(factor: Denominator) -> bool:
    """Whether a sum below the line is above zero whatever is absent."""
    return any(_needs(term) == [] for term in factor.terms)


def empty_sums(law: RateLaw, absent: Container[str]) -> dict[str, str]:
    """Species of `absent` without which a sum below the line is zero, those of one term: why, in words."""
    found: dict[str, str] = {}
    for factor in law.denominators:
        gone = [
            [name for name in _needs(term) if name in absent and name not in law.floors]
            for term in factor.terms
        ]
        if all(gone):
            fewest = min(len(names) for names in gone)
            first = next(names for names in gone if len(names) == fewest)
            found |= dict.fromkeys(first, "a sum below the line is zero without it")
    return found


def _needs(term: Term) -> list[str]:
    """Species without which a term is zero."""
    return [name for name, n in term.orders.items() if n > 0.0]


def _split(
    orders: Mapping[str, float], floors: Mapping[str, float], part: Callable[[str, float], float]
) -> Split:
    names = {**orders, **floors}
    floored = {name: part(name, orders.get(name, 0.0)) for name in floors}
    plain = {name: _whole(orders.get(name, 0.0) - floored.get(name, 0.0)) for name in names}
    return plain, {name: n for name, n in floored.items() if n != 0.0}


def _whole(n: float) -> float:
    return float(round(n)) if abs(n - round(n)) < 1e-9 else n


def singular(law: RateLaw) -> dict[str, str]:
    """Species without which the law, or its slope, is infinite: why, in words."""
    return {name: why for name in _named(law) if (why := _why(law, name))}


def useless_floors(law: RateLaw) -> list[str]:
    """Species whose floor would change nothing."""
    return [name for name in law.floors if not _acts(law, name)]


def _named(law: RateLaw) -> dict[str, None]:
    terms = [term for factor in law.denominators for term in factor.terms]
    return dict.fromkeys([*law.stoichiometry, *law.orders, *(name for term in terms for name in term.orders)])


def _acts(law: RateLaw, name: str) -> bool:
    return (
        floored_part(law, name) != 0.0
        or any(not is_plain(n) for n in _orders_below(law, name))
        or any(name in _needs(term) for one in law.denominators if not stays(one) for term in one.terms)
    )


def _orders_below(law: RateLaw, name: str) -> list[float]:
    return [term.orders[name] for factor in law.denominators for term in factor.terms if name in term.orders]


def _why(law: RateLaw, name: str) -> str:
    if not _acts(law, name):
        return ""
    named = [("in the forward rate", law.orders.get(name, 0.0))]
    if law.reversible:
        named.append(("in the backward rate", backward_orders(law).get(name, 0.0)))
    below_line = [("below the line", n) for n in _orders_below(law, name)]
    for where, n in [*named, *below_line]:
        if n < 0.0:
            return f"its order {where} is {n:g}"
    comes_to_rest = not law.reversible and law.stoichiometry.get(name, 0.0) < 0.0
    for where, n in below_line if comes_to_rest else [*named, *below_line]:
        if 0.0 < n < 1.0:
            return f"its order {where} is {n:g}, with an infinite slope there"
    return ""
