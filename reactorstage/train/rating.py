"""Rating: one pass at the final tolerance turned into named values, profiles, limits, money and closure."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.train_pass import EXTRAS
from reactorstage.train.balances import closure, warm_quenches
from reactorstage.train.closed_result import closed_result, closure_notes, effectivenesses
from reactorstage.train.closing import closed, put
from reactorstage.train.limits import names_of
from reactorstage.train.passing import Outcome
from reactorstage.train.potential import bed_potentials, potential_values, unlit_notes
from reactorstage.train.result import Closed, HeatSale, LimitState, Profile, Rating, StepState, Value
from reactorstage.train.states import Found, states, with_state

if TYPE_CHECKING:
    from reactorstage.train.forms import Form
    from reactorstage.train.limits import Bound
    from reactorstage.train.programme import Model, TrainProgramme

Array = NDArray[np.float64]

AT_WORK = 1e-6
"""A limit is at work when its margin is below this share of its scale."""

POINTS = 120
"""About how many points a profile has per bed."""


def rate(programme: TrainProgramme, x: Array, dense: bool, tolerance: float) -> Rating:
    """The train at x; a failure inside it gives a Rating with the sentence and what was reached."""
    model = programme.model
    x, outcome, known = _passed(model, x, tolerance)
    u, du = model.inputs.values(x)
    wanted = () if outcome.failure else model.catalogue.found
    base = model.base(outcome.out, u, du, x, wanted)[:, 0]
    profiles = _profiles(model, outcome, u, dense)
    quantities = _quantities(model, outcome, base)
    limits = () if outcome.failure else tuple(_limit(bound, base) for bound in model.bounds)
    if outcome.failure:
        status, atoms, energy = "no answer", float("nan"), float("nan")
    else:
        status = "inside all limits" if all(one.met or one.soft for one in limits) else "limits broken"
        atoms, energy = closure(model, base)
        quantities |= _closures(atoms, energy)
    closed_state = Closed()
    if known is not None and not outcome.failure:
        closed_state = closed_result(model, base, x, known)
        quantities |= effectivenesses(closed_state)
    quantities |= _peaks(model, profiles) | _outside(model, profiles)
    roles = _roles(model, base) if not outcome.failure else ("", "", "", ())
    potentials = bed_potentials(model, base, profiles, roles[0])
    quantities |= potential_values(model, potentials)
    return Rating(
        case=model.case,
        status=status,
        failure=outcome.failure,
        x=x,
        quantities=quantities,
        profiles=profiles,
        steps=_steps(model, base, outcome),
        limits=limits,
        money={}
        if outcome.failure
        else {k: float(f.top.value(base)) for k, f in model.catalogue.money.items()},
        heat=() if outcome.failure else _heat(model, base),
        species=model.chemistry.species,
        reactions=model.chemistry.reactions,
        nu=model.chemistry.laws.nu,
        main_reactant=roles[0],
        excess_reactant=roles[1],
        product=roles[2],
        by_products=roles[3],
        unpriced=tuple(dict.fromkeys(model.ladder.unpriced)),
        atoms=atoms,
        energy=energy,
        notes=(
            *closure_notes(closed_state),
            *unlit_notes(potentials),
            *warm_quenches(model, base, outcome),
            *_notes(model, quantities),
        ),
        integration_steps=outcome.steps,
        right_hand_sides=outcome.evaluations,
        chemistry=model.chemistry,
        closed=closed_state,
    )


def _passed(model: Model, x: Array, tolerance: float) -> tuple[Array, Outcome, Found | None]:
    """The pass at x, its closures closed from where they stand in x; all states of a closed train."""
    u, du = model.inputs.values(x)
    if not model.layout.closures:
        return x, model.passing.adaptive(u, du[:, :0], tolerance), None
    known, v = states(model, model.inputs.all_numbers(x)), model.inputs.all_numbers(x)
    solved = closed(model, v, tolerance)
    if solved.failure and known.states:
        solved = closed(model, known.states[0].v, tolerance)
    known = with_state(model, known, solved)
    if solved.mesh is None:
        outcome = model.passing.adaptive(u, du[:, :0], tolerance)
        failure = known.why or outcome.failure or solved.failure
        return x, replace(outcome, failure=failure, reached=0), known
    x = put(model, x, solved.v)
    u, du = model.inputs.values(x)
    return x, model.passing.frozen(u, np.ascontiguousarray(du[:, :0]), solved.mesh), known


def _profiles(model: Model, outcome: Outcome, u: Array, dense: bool) -> tuple[Profile, ...]:
    done = [bed for bed in model.layout.beds if bed.exit < outcome.reached]
    profiles = []
    for bed in done:
        w, T, p, F, r = model.passing.sample(outcome, bed, u, POINTS if dense else 1)
        start = len(model.layout.operations) * model.layout.width + (bed.number - 1) * EXTRAS
        peak, depth = outcome.out[start, 0], outcome.out[start + 1, 0]
        profiles.append(Profile(bed.owner, w, T, p, F, r, float(peak), float(depth * u[bed.inputs])))
    return tuple(profiles)


def _quantities(model: Model, outcome: Outcome, base: Array) -> dict[str, Value]:
    values: dict[str, Value] = {}
    listed = [
        *model.catalogue.names(),
        *_removals(model),
        model.case.aim.quantity,
        *(name for price in model.case.prices.values() for _, name in names_of(price.of, model.layout)),
        *(b.row.quantity for b in model.bounds if b.row.label != "heat ladder"),
    ]
    for name in dict.fromkeys(listed):
        form = model.catalogue.find(name)
        if outcome.failure and not _reached(model, form, outcome.reached):
            values[name] = Value(None, form.kind, "not reached")
            continue
        value = form.value(base)
        values[name] = Value(value, form.kind, "" if value is not None else form.reason)
    return values


def _removals(model: Model) -> list[str]:
    """Names of what removals take out, where there are any."""
    found = []
    for place in model.layout.places:
        removed = [what.split(", ") for _, kind, what in place.others if kind == "remove"]
        found += [f"{place.owner}.removed {name}" for names in removed for name in names]
    return found


def _reached(model: Model, form: Form, reached: int) -> bool:
    """Whether a form reads only records and beds that were finished, or inputs."""
    layout = model.layout
    records = len(layout.operations) * layout.width

    def there(index: int) -> bool:
        if index < records:
            return index < reached * layout.width
        if index < layout.rows:
            return layout.beds[(index - records) // EXTRAS].exit < reached
        return index < layout.rows + len(model.inputs.names)

    return all(there(index) for index in form.top.terms)


def _closures(atoms: float, energy: float) -> dict[str, Value]:
    return {"train.atom closure": Value(atoms, "number"), "train.energy closure": Value(energy, "number")}


def _peaks(model: Model, profiles: tuple[Profile, ...]) -> dict[str, Value]:
    """Depth of the hottest place of every bed that was reached."""
    places = {one.owner: one.w_peak / one.w[-1] if one.w[-1] > 0.0 else 0.0 for one in profiles}
    return {
        f"{bed.owner}.depth of the peak": Value(
            places.get(bed.owner), "fraction", "" if bed.owner in places else "not reached"
        )
        for bed in model.layout.beds
    }


def _outside(model: Model, profiles: tuple[Profile, ...]) -> dict[str, Value]:
    """Share of each bed's catalyst outside the validity window of each rate law that states one."""
    values: dict[str, Value] = {}
    for profile in profiles:
        for name, reaction in model.case.reactions.items():
            if reaction.valid is None:
                continue
            inside = [
                np.minimum(along - window[0], window[1] - along) / (window[1] - window[0])
                for window, along in (
                    (reaction.valid.temperature, profile.T),
                    (reaction.valid.pressure, profile.p),
                )
                if window is not None
            ]
            share = _share_below_zero(profile.w, np.min(inside, axis=0)) if inside else 0.0
            values[f"{profile.owner}.outside validity of {name}"] = Value(share, "fraction")
    return values


def _share_below_zero(w: Array, inside: Array) -> float:
    """Share of the catalyst where a piecewise linear `inside` (N,) is below zero."""
    if len(w) < 2 or w[-1] <= 0.0:
        return 0.0
    below = np.maximum(-inside, 0.0)
    ends, spread = below[1:] + below[:-1], np.abs(np.diff(inside))
    same_side = (inside[1:] < 0.0) == (inside[:-1] < 0.0)
    share = np.where(same_side, inside[1:] < 0.0, ends / np.where(spread > 0.0, spread, 1.0))
    return float((np.diff(w) * share).sum() / w[-1])


def _limit(bound: Bound, base: Array) -> LimitState:
    row = bound.row
    value = bound.form.value(base)
    sign = 1.0 if row.direction == "at most" else -1.0
    margin = None if value is None else sign * (row.bound - value)
    met = margin is None or margin >= -AT_WORK * row.scale
    at_work = margin is not None and abs(margin) <= AT_WORK * row.scale
    return LimitState(
        label=row.label,
        owner=row.owner,
        quantity=row.quantity,
        direction=row.direction,
        kind=row.kind,
        bound=row.bound,
        keep_away=row.keep_away,
        value=value,
        margin=margin,
        met=met,
        at_work=at_work,
        soft=row.soft_price is not None,
        implied=row.implied,
        why=row.why,
        reason="" if value is not None else bound.form.reason,
    )


def _steps(model: Model, base: Array, outcome: Outcome) -> tuple[StepState, ...]:
    layout, steps = model.layout, []
    for place in layout.places:
        injections, others = dict(place.injections), {k: (kind, what) for k, kind, what in place.others}
        devices = {device.operation: device for device in place.devices}
        for k in range(place.first, place.last + 1):
            if k >= outcome.reached or not (k in injections or k in devices or k in others):
                continue
            end = devices[k].end if k in devices else k
            before = layout.temperature(k - 1).value(base) if k > 0 else None
            after, Q = layout.temperature(end).value(base), 0.0
            if k in injections:
                flow = float(base[layout.rows + layout.amount(k)])
                kind = "take" if k == 0 else "inject" if k in layout.amounts else "recycle"
                what = injections[k]
            elif k in devices:
                device, flow = devices[k], 0.0
                what = device.levels if isinstance(device.levels, str) else ", ".join(device.levels)
                what = device.exchanger or what
                kind, Q = "heat" if device.heating else "cool", layout.heat_removed(device).value(base)
            else:
                kind, what = others[k]
                flow = (layout.total_flow(k) - layout.total_flow(k - 1)).value(base)
            steps.append(StepState(place.owner, kind, what, flow, Q, before, after))
    return tuple(steps)


def _heat(model: Model, base: Array) -> tuple[HeatSale, ...]:
    prices = _level_prices(model)
    return tuple(
        HeatSale(
            owner, level, form.value(base), form.value(base) * prices[level], model.ladder.heating[level]
        )
        for (owner, level), form in model.ladder.given.items()
    )


def _level_prices(model: Model) -> dict[str, float]:
    from reactorstage.train.heat import read_rungs

    return {name: rung.price for name, rung in read_rungs(model.case, []).items()}


EVEN = 6
"""Decimals to which conversions are compared when the main reactant is told by them; a tie is the first's."""


def _roles(model: Model, base: Array) -> tuple[str, str, str, tuple[str, ...]]:
    """Main (split) reactant, excess reactant, product and by-products, read from feeds and results."""
    from reactorstage.train.quantities import fed

    catalogue, names, nu = model.catalogue, model.chemistry.species, model.chemistry.laws.nu
    given = {name: fed(catalogue, name).value(base) for name in names}
    made = {name: catalogue.find(f"train.made {name}").top.value(base) for name in names}
    consumed = [n for s, n in enumerate(names) if (nu[:, s] < 0).any() and given[n] > 0.0 and made[n] < 0.0]
    split = [feed for feed in model.layout.feeds if model.case.feeds[feed].split is not None]
    main = ""
    for feed in split:
        row = model.layout.compositions[model.layout.feeds.index(feed)]
        reacting = [name for name in consumed if row[names.index(name)] > 0.0]
        main = max(reacting, key=lambda name: row[names.index(name)], default="")
        if main:
            break
    if not main:
        main = max(consumed, key=lambda name: round(-made[name] / given[name], EVEN), default="")
    partners = {
        n
        for r in range(len(nu))
        if main and nu[r, names.index(main)] < 0
        for s, n in enumerate(names)
        if nu[r, s] < 0
    }
    excess = max((n for n in consumed if n != main and n in partners), key=lambda n: given[n], default="")
    product = _product(nu, names, main, made)
    floor = 1e-9 * sum(given.values())
    others = sorted((n for n in names if made[n] > floor and n != product), key=lambda n: -made[n])
    return main, excess, product, tuple(others)


def _product(nu: Array, names: tuple[str, ...], main: str, made: dict[str, float]) -> str:
    """What the first reaction that consumes the main reactant makes; else the species made most."""
    for row in nu:
        if main and row[names.index(main)] < 0.0 and (row > 0.0).any():
            return names[int(row.argmax())]
    return max(names, key=lambda n: made[n])


def _notes(model: Model, quantities: dict[str, Value]) -> tuple[str, ...]:
    notes = [f"Heat of {owner} carries no price." for owner in dict.fromkeys(model.ladder.unpriced)]
    outside: dict[tuple[str, str], list[str]] = {}
    for name, value in quantities.items():
        owner, found, reaction = name.partition(".outside validity of ")
        if found and value.value:
            outside.setdefault((owner, f"{100.0 * value.value:.0f} %"), []).append(reaction)
    alike: dict[tuple[str, str], list[str]] = {}
    for (owner, share), reactions in outside.items():
        alike.setdefault((share, ", ".join(reactions)), []).append(owner)
    for (share, reactions_), owners in alike.items():
        each = "" if len(owners) == 1 else "each of "
        where = f"{share} of {each}{', '.join(owners)}"
        notes.append(f"{where} lies outside the stated validity of {reactions_}.")
    return tuple(notes)
