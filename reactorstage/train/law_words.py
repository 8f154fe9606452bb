"""What of a rate law goes beyond a power law, in words for `check`."""

from __future__ import annotations

from dataclasses import dataclass
from math import exp
from typing import TYPE_CHECKING

from reactorstage.case import units
from reactorstage.case.model import Effectiveness, Factor, Reaction, TemperatureForm
from reactorstage.chemistry.agreement import Agreement
from reactorstage.chemistry.rates import ln_k

if TYPE_CHECKING:
    from reactorstage.train.chemistry import CaseChemistry


@dataclass(frozen=True)
class LawWords:
    """k at two temperatures, what stands below the line, floors, effectiveness; texts, empty where plain.

    agreement compares an equilibrium constant of the law's own with the Gibbs energies within the shares and
    J/mol of `allowed`; None for one that is taken from them.
    """

    k: tuple[str, str]
    below: str
    floors: str
    effectiveness: str
    power_of_K: float
    agreement: Agreement | None
    allowed: tuple[float, float]

    @property
    def plain(self) -> bool:
        return not (self.below or self.floors or self.effectiveness or self.power_of_K != 1.0)


def law_words(given: Reaction, name: str, chemistry: CaseChemistry, T: tuple[float, float]) -> LawWords:
    """Words for the law of one reaction; T in K are the temperatures at which k is shown."""
    r = chemistry.reactions.index(name)
    own = given.backward if not isinstance(given.backward, str) else None
    return LawWords(
        k=(_k(given, chemistry, r, T[0]), _k(given, chemistry, r, T[1])),
        below="".join(_factor(factor) for factor in given.slowed_by or ()),
        floors=", ".join(f"{species} {100.0 * share:g} %" for species, share in given.floor.items()),
        effectiveness=_effectiveness(given.effectiveness) if given.effectiveness else "",
        power_of_K=given.power_of_K,
        agreement=chemistry.agreements.get(name),
        allowed=(own.may_differ_from_Gibbs_by, own.heat_may_differ_by) if own else (0.0, 0.0),
    )


def _k(given: Reaction, chemistry: CaseChemistry, r: int, T: float) -> str:
    total = float(chemistry.laws.alpha[r].sum())
    unit = units.rate_constant_unit(given.rate_per, given.driven_by, total)
    return f"{exp(ln_k(chemistry.laws, T)[r]) / units.in_unit(f'1 {unit}', unit):.4g} {unit}"


def _factor(factor: Factor) -> str:
    terms = [_term(term.constant, term.orders) for term in factor.terms]
    return f"({' + '.join(terms)})" + (f"^{factor.power:g}" if factor.power != 1.0 else "")


def _term(constant: TemperatureForm, orders: dict[str, float]) -> str:
    drivers = [name if n == 1.0 else f"{name}^{n:g}" for name, n in orders.items()]
    plain = constant.is_ is not None and constant.energy is None
    return " ".join([constant.is_.text if plain and constant.is_ else "K", *drivers])


def _effectiveness(given: Effectiveness) -> str:
    if given.factor is not None:
        return f"{given.factor:g}"
    if given.Thiele is not None:
        return f"Thiele modulus, {given.Thiele.shape}, {given.Thiele.key_species}"
    words = f"T^{len(given.powers_of_T or ()) - 1}"
    if given.conversion is not None:
        words += f" and conversion of {given.conversion.of}"
    return f"polynomial in {words}"
