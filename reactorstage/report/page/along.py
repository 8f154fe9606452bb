"""Charts of values along the train: beds as bands, today's setting thin behind, limits dashed."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from reactorstage.report import look
from reactorstage.report.display import brief, fixed, unit
from reactorstage.report.page.chart import Area, Chart, Curve, Label, Reading
from reactorstage.report.page.subject import Subject
from reactorstage.report.profiles import BedProfile, train_profiles
from reactorstage.train.result import Array, Rating

MOST_POINTS = 61
Value = Callable[[Rating, BedProfile], Array]


@dataclass(frozen=True)
class Line:
    """A value along the beds: its name, unit, colour, how it is found, the style of its line."""

    name: str
    unit: str
    colour: str
    value: Value
    kind: str = "this"
    decimals: int | None = None

    def text(self, value: float) -> str:
        """A number of the read-out."""
        if not np.isfinite(value):
            return "-"
        return brief(float(value), 4) if self.decimals is None else fixed(float(value), self.decimals)


@dataclass(frozen=True)
class Along:
    """The beds of this setting and of today's, thinned out to what a screen can show."""

    rating: Rating
    beds: tuple[BedProfile, ...]
    today: Rating | None
    before: tuple[BedProfile, ...]

    @property
    def end(self) -> float:
        return max(float(bed.catalyst[-1]) for bed in (*self.beds, *self.before))

    @property
    def comparable(self) -> bool:
        """Whether today's beds are the same ones."""
        return [bed.owner for bed in self.beds] == [bed.owner for bed in self.before]


def along(subject: Subject) -> Along | None:
    """What charts along the train are drawn from; None where no bed was rated."""
    beds = train_profiles(subject.now)
    if not any(bed.catalyst[-1] > bed.catalyst[0] for bed in beds):
        return None
    today = subject.behind
    return Along(subject.now, tuple(beds), today, tuple(train_profiles(today)) if today is not None else ())


def kept(bed: BedProfile) -> Array:
    """Indices of the points that are drawn, both ends among them."""
    count = len(bed.catalyst)
    return np.unique(np.linspace(0, count - 1, min(count, MOST_POINTS)).round().astype(int))


def chart(
    what: Along,
    key: str,
    title: str,
    lines: Sequence[Line],
    y_name: str,
    *,
    zero: bool = False,
    logarithmic: bool = False,
    y_range: tuple[float, float] | None = None,
    more: Sequence[Curve] = (),
    labels: Sequence[Label] = (),
    areas: Sequence[Area] = (),
    legend: Sequence[tuple[str, str, str]] = (),
    note: str = "",
) -> Chart:
    """A chart of some lines; more holds curves that are not values of beds, such as limits."""
    curves = [curve for line in lines for curve in _curves(what, line)]
    found = y_range or values_range([curve.y for curve in (*curves, *more)], zero, logarithmic)
    named = [(line.kind, line.colour, line.name) for line in lines] if len(lines) > 1 else []
    own = look.INK if named else lines[0].colour
    return Chart(
        key=key,
        title=title,
        alt=alternative(what, lines),
        x_name=f"catalyst from the train inlet, {unit('mass')}",
        y_name=y_name,
        x_range=(0.0, what.end),
        y_range=found,
        curves=(*more, *curves),
        labels=tuple(labels),
        areas=(*bands(what), *areas),
        legend=(*named, *_settings(what, own), *legend),
        readings=tuple(reading(what, line) for line in lines),
        logarithmic=logarithmic,
        note=note,
    )


def _settings(what: Along, colour: str) -> list[tuple[str, str, str]]:
    """This setting and today's, where there are two."""
    return [("this", colour, "this setting"), ("today", colour, "today")] if what.before else []


def bands(what: Along) -> list[Area]:
    """Every second bed shaded, each with its name."""
    beds = [bed for bed in what.beds if bed.catalyst[-1] > bed.catalyst[0]]
    return [
        Area(float(b.catalyst[0]), float(b.catalyst[-1]), b.owner, "bare" if k % 2 else "band", b.owner)
        for k, b in enumerate(beds)
    ]


def _curves(what: Along, line: Line) -> list[Curve]:
    found = []
    pairs = [(what.rating, what.beds, False)]
    if what.today is not None:
        pairs.insert(0, (what.today, what.before, True))
    for rating, beds, today in pairs if line.kind != "dot" else pairs[-1:]:
        for bed in beds:
            points = kept(bed)
            kind = line.kind if not today else "today" if line.kind == "this" else f"{line.kind} thin"
            y = line.value(rating, bed)[points]
            found.append(Curve(bed.catalyst[points], y, line.colour, kind, bed.owner, today))
    return found


def reading(what: Along, line: Line) -> Reading:
    """Numbers for the read-out; today's at the same depth of the same bed."""
    now, was, places, levels = [], [], [], []
    for k, bed in enumerate(what.beds):
        points = kept(bed)
        values = line.value(what.rating, bed)[points]
        now.append(tuple(map(line.text, values)))
        places.append(bed.catalyst[points])
        levels.append(values)
        if what.today is not None and what.comparable:
            other = what.before[k]
            same = np.interp(bed.depth[points], other.depth, line.value(what.today, other))
            was.append(tuple(map(line.text, same)))
    return Reading(line.name, line.unit, tuple(now), tuple(was), tuple(places), tuple(levels))


def alternative(what: Along, lines: Sequence[Line]) -> str:
    """The chart in words: where each line begins and ends in each bed."""
    sentences = []
    for line in lines:
        ends = [
            f"{bed.owner} from {line.text(values[0])} to {line.text(values[-1])}"
            for bed in what.beds
            for values in [line.value(what.rating, bed)]
        ]
        sentences.append(f"{line.name}, {line.unit or 'plain number'}: {'; '.join(ends)}.")
    return " ".join(sentences)


def values_range(values: Sequence[Array], zero: bool, logarithmic: bool) -> tuple[float, float]:
    """A range that holds all values with some room; of logarithmic axes at most six decades."""
    every = np.concatenate([np.asarray(value, dtype=float) for value in values])
    every = every[np.isfinite(every)]
    if not every.size:
        return 0.0, 1.0
    top = float(every.max())
    if logarithmic:
        top = top if top > 0.0 else 1.0
        positive = every[every > top * 1e-6]
        low = float(positive.min()) if positive.size else top / 10.0
        return min(low / 1.3, top / 8.0), top * 1.3
    low = float(every.min())
    low = min(0.0, low) if zero else low
    span = max(top - low, 0.02 * max(abs(top), abs(low)), 1e-12)
    return (low if zero and low == 0.0 else low - 0.06 * span), top + 0.07 * span
