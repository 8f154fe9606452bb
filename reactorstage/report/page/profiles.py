"""The charts of the section on profiles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from reactorstage.report import look
from reactorstage.report.composition import panels_of
from reactorstage.report.display import allowed, places, shown, unit
from reactorstage.report.page.along import Along, Line, Value, chart, values_range
from reactorstage.report.page.chart import Area, Chart, Curve, Label, spread_labels
from reactorstage.report.profiles import BedProfile, displayed, train_profiles
from reactorstage.report.rates import lighting, used
from reactorstage.report.selectivity import least_loss, point_value, says_something
from reactorstage.report.temperature import (
    PEAK_SHOWN_K,
    equilibria,
    lifted,
    places_of_gaps,
    temperature_limits,
)
from reactorstage.report.unit_sets import RATE
from reactorstage.train.result import Array, Rating

GREY_TEXT = "#565b63"
EXIT_WIDTH = 44.0
SHARES_MADE = "Numbers: the share of the rise of a bed that is made. A bed that reacts late is barely lit."
STYLES = ("this", "chain", "dash", "dot")


def profile_charts(what: Along) -> tuple[Chart, ...]:
    """Temperature, flows, selectivity, rate and pressure, as far as they say something."""
    charts = [temperature(what), *flows(what)]
    if says_something(what.rating):
        charts += selectivities(what)
    if what.rating.main_reactant in what.rating.species:
        charts.append(rates(what))
    return (*charts, pressure(what))


def temperature(what: Along) -> Chart:
    """Beds, steps of gaps, limits and the adiabatic equilibrium of what enters each bed."""
    line = Line("temperature", unit("temperature"), look.TEMPERATURE, lambda _, bed: bed.T, decimals=1)
    curves = [line.value(what.rating, bed) for bed in what.beds]
    curves += [line.value(what.rating, bed) for bed in what.before]
    limits = near_limits(what.rating, curves)
    levels = equilibrium_curves(what, curves)
    drawn = [*curves, *(curve.y for curve in (*limits, *levels))]
    y_range = values_range(drawn, False, False)
    gaps = [*gap_curves(what.rating, what.beds, False)]
    gaps += gap_curves(what.today, what.before, True) if what.today is not None else []
    legend = [("gap", look.TEMPERATURE, "injection")] if any(c.kind == "gap" for c in gaps) else []
    legend += [("limit", look.LIMIT, "limit")] if limits else []
    legend += [("chain", look.INK, equilibrium_words(what.rating))] if levels else []
    made = chart(
        what, "temperature", "Temperature", [line], f"temperature, {unit('temperature')}",
        y_range=y_range, more=[*limits, *levels, *gaps], legend=legend, labels=end_values(what, y_range),
    )  # fmt: skip
    names = spread_labels(limit_names(what, y_range), made.y)
    return replace(made, labels=(*made.labels, *names))


def end_values(what: Along, y_range: tuple[float, float]) -> list[Label]:
    """Exit temperatures, over the equilibrium where that lies close above them, and peaks that are hotter."""
    found = []
    levels = equilibria(what.rating, what.beds)
    for bed in what.beds:
        if bed.catalyst[-1] <= bed.catalyst[0]:
            continue
        exit_ = float(bed.T[-1])
        height = exit_ + lifted(exit_, levels.get(bed.owner), y_range)
        found.append(
            Label(float(bed.catalyst[-1]), height, _degrees(exit_), "end", (-3.0, -4.0), bed=bed.owner)
        )
        if bed.T_peak > max(exit_, float(bed.T[0])) + PEAK_SHOWN_K:
            found.append(
                Label(
                    bed.peak_catalyst,
                    bed.T_peak,
                    f"{_degrees(bed.T_peak)} peak",
                    "middle",
                    (0.0, -6.0),
                    bed=bed.owner,
                )
            )
    return found


def _degrees(T: float) -> str:
    return f"{T:.{places('temperature', 1)}f}"


def near_limits(rating: Rating, values: Sequence[Array]) -> list[Curve]:
    """Dashed levels over the beds that a limit on temperature speaks of, where they lie near the values."""
    low, high = min(float(v.min()) for v in values), max(float(v.max()) for v in values)
    reach = 0.5 * max(high - low, 2.0)
    beds = {bed.owner: bed for bed in train_profiles(rating)}
    found = []
    for state in temperature_limits(rating):
        bound = shown(state.bound, state.kind) or 0.0
        if state.owner in beds and low - reach < bound < high + reach:
            found.append(_level(beds[state.owner], bound, look.LIMIT, "limit"))
    return found


def _level(bed: BedProfile, value: float, colour: str, kind: str) -> Curve:
    return Curve(bed.catalyst[[0, -1]], np.array([value, value]), colour, kind, bed.owner)


def limit_names(what: Along, y_range: tuple[float, float]) -> list[Label]:
    """Each label and bound once, at the right over its line, beside the last exit where that stands there."""
    names = {
        f"{state.label} {allowed(state.bound, state.kind)}": shown(state.bound, state.kind) or 0.0
        for state in temperature_limits(what.rating)
    }
    span = y_range[1] - y_range[0]
    last = float(what.beds[-1].T[-1])
    found = []
    for text, bound in names.items():
        if y_range[0] < bound < y_range[1]:
            aside = EXIT_WIDTH if abs(bound - last) < 0.1 * span else 0.0
            below = 12.0 if bound > y_range[1] - 0.06 * span else -4.0
            found.append(Label(what.end, bound, text, "end", (-aside, below), GREY_TEXT))
    return found


def equilibrium_words(rating: Rating) -> str:
    """What the levels of equilibrium are; said apart where a law comes to rest elsewhere."""
    own = rating.chemistry is not None and bool(rating.chemistry.laws.own_K.any())
    return f"adiabatic equilibrium of what enters{', by Gibbs energies' if own else ''}"


def equilibrium_curves(what: Along, values: Sequence[Array]) -> list[Curve]:
    """The adiabatic equilibrium temperature of what enters each bed, where it lies near."""
    high = max(float(v.max()) for v in values)
    low = min(float(v.min()) for v in values)
    known = equilibria(what.rating, what.beds)
    return [
        _level(bed, known[bed.owner], look.INK, "chain")
        for bed in what.beds
        if bed.owner in known and low < known[bed.owner] < high + 0.5 * (high - low)
    ]


def gap_curves(rating: Rating, beds: Sequence[BedProfile], today: bool) -> list[Curve]:
    """Steps of gaps as uprights: injections dotted, exchangers solid."""
    found = []
    for place, x in places_of_gaps(beds):
        for step in rating.steps:
            if step.owner == place and place.startswith("gap") and step.T_before is not None:
                T = displayed(np.array([step.T_before, step.T_after]), "temperature")
                kind = "gap" if step.kind == "inject" else "exchanger"
                kind = f"{kind} thin" if today else kind
                found.append(Curve(np.array([x, x]), T, look.TEMPERATURE, kind, bed_behind(place), today))
    return found


def bed_behind(gap: str) -> str:
    """The bed that a gap leads to: both are switched together."""
    return f"bed {int(gap.removeprefix('gap ')) + 1}"


def flows(what: Along) -> list[Chart]:
    """One chart for each size of flow."""
    flow = unit("molar flow")
    keys = {"flow": ("flows", "Flows of the main species"), "by-products": ("by-products", "By-products")}
    found = []
    for panel in panels_of(what.rating):
        name = panel.name.partition(",")[0]
        key, title = keys.get(name, ("main-reactant", f"Flow of {name}"))
        lines = [
            Line(curve.species, flow, curve.colour, of_species("F", curve.species), _style(k, curve.colour))
            for k, curve in enumerate(panel.curves)
        ]
        found.append(
            chart(
                what, key, title, lines, panel.name, zero=not panel.logarithmic, logarithmic=panel.logarithmic
            )
        )
    return found


def _style(number: int, colour: str) -> str:
    """Species of one role share a colour and differ in style."""
    return STYLES[number % len(STYLES)] if colour == look.BY_PRODUCT else "this"


def of_species(part: str, name: str) -> Value:
    """A function of rating and bed that gives F, point or cumulative of a species (N,)."""

    def value(rating: Rating, bed: BedProfile) -> Array:
        if name not in rating.species:
            return np.full(len(bed.catalyst), np.nan)
        column: Array = getattr(bed, part)[:, rating.species.index(name)]
        return column

    return value


def selectivities(what: Along) -> list[Chart]:
    """Summed from the inlet and at the point: product, by-products."""
    basis = f"mol per 100 mol {what.rating.main_reactant} converted"
    product = _selectivity(what, (what.rating.product,), look.PRODUCT)
    others = _selectivity(what, what.rating.by_products[: len(STYLES)], look.BY_PRODUCT)
    ends = [values_range(_readable(what, lines), False, False) for lines in (product, others)]
    return [
        chart(what, "selectivity", f"Selectivity to {what.rating.product}", product, basis, y_range=ends[0]),
        chart(what, "loss", "Selectivity to by-products", others, basis, y_range=ends[1]),
    ]


def _selectivity(what: Along, species: Sequence[str], colour: str) -> list[Line]:
    lines = []
    for k, name in enumerate(species):
        lines.append(
            Line(f"{name}, summed", "mol %", colour, of_species("cumulative", name), _style(k, colour), 1)
        )
    if len(species) == 1:
        lines.append(Line("at this point", "mol %", colour, _point(what, species[0]), "dot", 1))
    return lines


def _point(what: Along, name: str) -> Value:
    """The selectivity at each point, nan where the main reactant hardly reacts any more."""
    least = least_loss(what.rating, (*what.beds, *what.before))

    def value(rating: Rating, bed: BedProfile) -> Array:
        if name not in rating.species:
            return np.full(len(bed.catalyst), np.nan)
        return point_value(rating, rating.species.index(name), least)(bed)

    return value


def _readable(what: Along, lines: Sequence[Line]) -> list[Array]:
    """All sums, and point values as far as they leave the sums readable."""
    sums = [line.value(what.rating, bed) for line in lines if line.kind != "dot" for bed in what.beds]
    points = [line.value(what.rating, bed) for line in lines if line.kind == "dot" for bed in what.beds]
    every = np.concatenate(sums)
    every = every[np.isfinite(every)]
    if not every.size:
        return [*sums, *points]
    low, high = float(every.min()), float(every.max())
    reach = 1.5 * max(high - low, 1.0)
    return [*sums, *(np.clip(one, low - reach, high + reach) for one in points)]


def rates(what: Along) -> Chart:
    """How fast the main reactant is used; the stretch before 10 % of the rise shaded."""
    name = what.rating.main_reactant
    line = Line(f"{name} used", unit(RATE), look.SPLIT_REACTANT, _used)
    dark = [
        Area(*place.dark, kind="dark", bed=place.owner)
        for place in lighting(what.rating, what.beds)
        if place.dark is not None
    ]
    dots = [
        Label(depth, _at(what, bed, depth), f"{share} %", shift=(5.0, -4.0), bed=bed.owner)
        for place in lighting(what.rating, what.beds)
        for bed in what.beds
        if bed.owner == place.owner
        for depth, share in zip(place.depths[1:], (50, 90), strict=True)
        if depth is not None
    ]  # fmt: skip
    return chart(
        what, "rates", f"Rate at which {name} is used", [line], f"{name} used, {unit(RATE)}", zero=True,
        areas=dark, labels=dots, legend=[("dark", "", "below 10 % of the rise")], note=SHARES_MADE,
    )  # fmt: skip


def _at(what: Along, bed: BedProfile, depth: float) -> float:
    return float(np.interp(depth, bed.catalyst, _used(what.rating, bed)))


def _used(rating: Rating, bed: BedProfile) -> Array:
    if rating.main_reactant not in rating.species:
        return np.full(len(bed.catalyst), np.nan)
    return used(rating)(bed)


def pressure(what: Along) -> Chart:
    """Pressure along the beds."""
    line = Line("pressure", unit("pressure"), look.PRESSURE, lambda _, bed: bed.p)
    return chart(what, "pressure", "Pressure", [line], f"pressure, {unit('pressure')}")
