"""How settings are entered by hand, from the `panel` section of a case or by kind where it says nothing."""

from __future__ import annotations

from dataclasses import dataclass
from difflib import get_close_matches
from math import floor, log10
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.case import units
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.evaluation import FreeNumber
from reactorstage.train.limits import DIFFERENCE

if TYPE_CHECKING:
    from reactorstage.case.model import Case

Array = NDArray[np.float64]

USUAL = {
    "temperature": "1 K",
    "temperature difference": "1 K",
    "pressure": "0.1 bar",
    "molar flow": "0.5 kmol/h",
    "mass flow": "0.1 t/h",
    "fraction": "1 %",
    "power": "0.05 MW",
}
"""Steps where a case states none (common practice, no source), never more than a fortieth of the range.

What is of another kind (catalyst by mass or volume, its activity) is not set on a panel: it stays as today
unless the case states a step."""

LEAST_STEPS = 40
SHARE = 0.01
NOISE_SHARE = 0.001


@dataclass(frozen=True)
class Panel:
    """steps and origins (D,) in SI: what can be entered is origin + n * step; 0 for what cannot be.

    flat is the band of cost within which an answer counts as flat, flat_share that as a part of the sum of
    absolute money terms (one of the two); noise, or noise_share, the gain below which a move is left out.
    """

    steps: Array
    origins: Array
    flat: float | None = None
    flat_share: float = SHARE
    noise: float | None = None
    noise_share: float = NOISE_SHARE

    def band(self, turnover: float) -> float:
        """Cost within which an answer counts as flat, for the sum of absolute money terms."""
        return self.flat if self.flat is not None else self.flat_share * turnover

    def least_gain(self, turnover: float) -> float:
        """Gain below which a move is left out, for the sum of absolute money terms."""
        return self.noise if self.noise is not None else self.noise_share * turnover


def read_panel(case: Case, numbers: tuple[FreeNumber, ...], aim_kind: str) -> Panel:
    """The panel of a compiled case; raises CaseProblems for names and units that do not fit."""
    problems: list[Problem] = []
    given = _given_steps(case, numbers, problems)
    steps = np.array([given.get(k, usual_step(one)) for k, one in enumerate(numbers)])
    origins = np.array([origin_of(one.kind) for one in numbers])
    flat, flat_share = _money(case, "flat within", aim_kind, SHARE, problems)
    noise, noise_share = _money(case, "least gain", aim_kind, NOISE_SHARE, problems)
    if problems:
        raise CaseProblems(problems)
    return Panel(steps, origins, flat, flat_share, noise, noise_share)


def origin_of(kind: str) -> float:
    """The SI value that the display unit calls zero: what is entered counts from there."""
    return units.KINDS[kind].scale * units.KINDS[kind].offset


def usual_step(number: FreeNumber) -> float:
    """The step of its kind in SI or, where the range is narrow, a round part of the range."""
    usual = USUAL.get(number.kind)
    if number.internal or usual is None:
        return 0.0
    kind = DIFFERENCE.get(number.kind, number.kind)
    return min(units.to_si(usual, kind), _round_below((number.high - number.low) / LEAST_STEPS, kind))


def _round_below(size: float, kind: str) -> float:
    """The largest 1, 2 or 5 times a power of ten, in display units, that is no more than a size."""
    scale = units.KINDS[kind].scale
    shown = max(size / scale, 1e-12)
    power = 10.0 ** floor(log10(shown))
    return max(one for one in (1.0, 2.0, 5.0) if one * power <= shown * 1.0000001) * power * scale


def _given_steps(case: Case, numbers: tuple[FreeNumber, ...], problems: list[Problem]) -> dict[int, float]:
    """Steps by number; a number's own name counts before `every bed.`, and that before its kind."""
    found: dict[int, float] = {}
    ranked = sorted(case.panel.steps.items(), key=lambda item: _rank(item[0])) if case.panel else []
    for name, raw in ranked:
        path = ("panel", "steps", name)
        places = [k for k, one in enumerate(numbers) if not one.internal and _called(name, one)]
        if not places:
            if name not in units.KINDS:
                problems.append(case.problem(path, *_unknown(name, numbers), on_key=True))
            continue
        for k in places:
            try:
                step = units.to_si(raw.text, DIFFERENCE.get(numbers[k].kind, numbers[k].kind))
            except units.UnitProblem as error:
                problems.append(case.problem(path, error.message, error.hint))
                break
            if step <= 0.0:
                problems.append(
                    case.problem(path, "a step is above zero", "leave the key out for the usual step")
                )
                break
            found[k] = step
    return found


def _rank(name: str) -> int:
    return 0 if name in units.KINDS else 1 if name.startswith("every ") else 2


def _called(name: str, number: FreeNumber) -> bool:
    owner, _, quantity = name.partition(".")
    if owner in ("every bed", "every gap"):
        return (
            number.name.startswith(owner.removeprefix("every ")) and number.name.partition(".")[2] == quantity
        )
    return name in (number.name, number.kind)


def _unknown(name: str, numbers: tuple[FreeNumber, ...]) -> tuple[str, str]:
    known = [*(one.name for one in numbers if not one.internal), *USUAL]
    near = get_close_matches(name, known, n=3, cutoff=0.4) or known[:3]
    return f"{name!r} is neither a free number nor a kind of quantity", f"nearest: {', '.join(near)}"


def _money(
    case: Case, key: str, aim_kind: str, usual: float, problems: list[Problem]
) -> tuple[float | None, float]:
    """An amount of what is aimed at, or a share of the money terms."""
    raw = getattr(case.panel, key.replace(" ", "_")) if case.panel else None
    if raw is None:
        return None, usual
    kind = DIFFERENCE.get(aim_kind, aim_kind)
    try:
        if raw.text.endswith("%") and kind != "fraction":
            return None, units.to_si(raw.text, "fraction")
        return units.to_si(raw.text, kind, case.currency, case.hours_per_year), usual
    except units.UnitProblem as error:
        problems.append(case.problem(("panel", key), error.message, error.hint))
        return None, usual
