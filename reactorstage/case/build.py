"""From the case as written to the case as used: rest filled in, splits ordered, steps made uniform."""

from __future__ import annotations

from pathlib import Path
from typing import Any, Literal, TypeVar, cast

from reactorstage.case.fields import Number, Raw
from reactorstage.case.model import (
    Case,
    Feed,
    HeatLevels,
    Limit,
    Panel,
    Recycle,
    Section,
    Source,
    Split,
    Step,
)
from reactorstage.case.written import (
    Bed,
    CaseWritten,
    CoolStep,
    FeedWritten,
    HeatLevelsWritten,
    HeatStep,
    LimitWritten,
    PanelWritten,
    SplitWritten,
    StepWritten,
)
from reactorstage.case.written_chemistry import (
    FROM_GIBBS,
    REVERSIBLE,
    Reaction,
    ReactionsWritten,
    Species,
    SpeciesData,
)
from reactorstage.case.written_gaps import RecycleSplitWritten

Data = TypeVar("Data", bound=SpeciesData)

__all__ = ["build", "extras", "free_beds", "rest_of"]


def build(written: CaseWritten, source: Source, folder: Path) -> Case:
    """The case for a checked file; `folder` is where names of data files are looked up."""
    case = Case(
        name=written.case,
        format=written.format,
        aim=written.aim,
        percent=written.percent,
        currency=written.currency,
        hours_per_year=written.hours_per_year,
        species={name: _species(species, folder) for name, species in written.species.items()},
        fluid=written.fluid,
        reactions={name: _reaction(reaction) for name, reaction in extras(written.reactions).items()},
        feeds={name: _feed(feed) for name, feed in written.feeds.items()},
        train=tuple(_section(index, section) for index, section in enumerate(written.train)),
        exchangers=written.exchangers,
        recycles={
            name: Recycle(flow=one.flow, split=_split(one.split, one.flow) if one.split else None)
            for name, one in written.recycles.items()
        },
        heat_levels=_heat_levels(written.heat_levels),
        prices=written.prices,
        limits={label: _limit(limit) for label, limit in written.limits.items()},
        panel=_panel(written.panel),
    )
    case._source = source
    return case


def extras(model: ReactionsWritten | HeatLevelsWritten) -> dict[str, Any]:
    """The entries by name of a mapping that also has fixed keys."""
    return dict(model.model_extra or {})


def data_file(gas_data: str) -> tuple[str, str]:
    """File and name of "file.yaml:NAME"; the file is empty for a plain name."""
    file, _, name = gas_data.rpartition(":")
    return file, name


def _species(species: Species, folder: Path) -> Species:
    isomers = tuple(_placed(one, folder) for one in species.isomers) if species.isomers else None
    return _placed(species, folder).model_copy(update={"isomers": isomers})


def _placed(data: Data, folder: Path) -> Data:
    """Data whose file, if they name one, is found from anywhere."""
    file, name = data_file(data.gas_data or "")
    if not file:
        return data
    return data.model_copy(update={"gas_data": f"{(folder / file).resolve()}:{name}"})


def _reaction(reaction: Reaction) -> Reaction:
    backward = (reaction.backward or FROM_GIBBS) if REVERSIBLE in reaction.equation else None
    return reaction.model_copy(update={"backward": backward})


def _feed(feed: FeedWritten) -> Feed:
    split = _split(feed.split, feed.flow) if feed.split else None
    return Feed(
        flow=feed.flow,
        temperature=feed.temperature,
        composition=fractions(feed.composition),
        split=split,
        pressure=feed.pressure,
        phase=feed.phase,
    )


def fractions(composition: dict[str, float | None]) -> dict[str, float]:
    """Shares with the rest filled in, scaled to sum to exactly 1 (they were checked to do so nearly)."""
    known = sum(share for share in composition.values() if share is not None)
    filled = {name: 1.0 - known if share is None else share for name, share in composition.items()}
    total = sum(filled.values())
    return {name: share / total for name, share in filled.items()}


def free_beds(split: SplitWritten | RecycleSplitWritten) -> tuple[str, ...]:
    """The beds named in `free`."""
    if split.free == "all":
        return tuple(split.now)
    return cast(tuple[str, ...], split.free or ())


def rest_of(split: SplitWritten | RecycleSplitWritten) -> str | None:
    """The bed that takes what is left: the one that says so or, when all are free, the last."""
    named = [bed for bed, entry in split.now.items() if entry is None]
    if named:
        return named[0]
    return list(split.now)[-1] if split.free == "all" else None


def _split(split: SplitWritten | RecycleSplitWritten, flow: Number) -> Split:
    rest, free = rest_of(split), free_beds(split)
    entries = {bed: entry for bed, entry in split.now.items() if entry is not None}
    kind = next((entry.kind for entry in entries.values()), "fraction")
    most = 1.0 if kind == "fraction" else flow.high if flow.high is not None else flow.now
    values = {
        bed: Number(entry.now, 0.0, most, entry.kind) if bed in free and not entry.free else entry
        for bed, entry in entries.items()
        if bed != rest
    }
    return Split(values=values, rest=rest, beds=tuple(split.now), kind=kind)


def _section(index: int, section: dict[str, Any]) -> Section:
    ((owner, body),) = section.items()
    kind = cast(Literal["entry", "bed", "gap", "effluent"], owner.split()[0])
    if isinstance(body, Bed):
        return Section(owner=owner, kind=kind, index=index, bed=body)
    return Section(owner=owner, kind=kind, index=index, steps=tuple(_step(step) for step in body))


def _step(step: StepWritten) -> Step:
    if step.heat:
        return _device("heat", step.heat, step.heat.heat_added)
    if step.cool:
        return _device("cool", step.cool, step.cool.heat_removed)
    if step.remove:
        return Step(kind="remove", removed=step.remove)
    if step.pressure_drop:
        return Step(kind="pressure drop", pressure=step.pressure_drop)
    if step.draw:
        return Step(kind="draw", feed=step.draw)
    return Step(kind="take", feed=step.take) if step.take else Step(kind="inject", feed=step.inject)


def _device(kind: Literal["heat", "cool"], device: HeatStep | CoolStep, heat: Number | None) -> Step:
    return Step(
        kind=kind,
        holds=device.holds,
        to=device.to,
        heat=heat,
        levels=device.levels_named or (),
        exchanger=device.exchanger,
        area=device.area,
        coefficient=device.coefficient,
        fouling=device.fouling_resistance,
        bypassed=device.state == "bypassed",
    )


def _heat_levels(written: HeatLevelsWritten | None) -> HeatLevels | None:
    if written is None:
        return None
    return HeatLevels(minimum_approach=written.minimum_approach, levels=extras(written))


def _panel(written: PanelWritten | None) -> Panel | None:
    if written is None:
        return None
    return Panel(steps=written.steps, least_gain=written.least_gain, flat_within=written.flat_within)


def _limit(limit: LimitWritten) -> Limit:
    exceptions = {
        owner: {key: bound for key in BOUNDS if (bound := getattr(exception, key)) is not None}
        for owner, exception in limit.exceptions.items()
    }
    return Limit(
        of=limit.of,
        at_most=limit.at_most,
        at_least=limit.at_least,
        keep_away=limit.keep_away,
        why=limit.why,
        soft=limit.soft,
        exceptions=cast(dict[str, dict[str, Raw]], exceptions),
    )


BOUNDS = ("at_most", "at_least", "keep_away")
