"""How far the streams of a real fluid are from condensing or boiling, place by place."""

from __future__ import annotations

from collections.abc import Sequence

from reactorstage.report.beds import signs_of, values_of
from reactorstage.report.display import told, unit
from reactorstage.report.table import Column, Table, marked, table
from reactorstage.train.result import Rating

WORDS = ("dew point", "bubble point")
NONE_THERE = "none"
NEAR = 15.0
"""K; a stream nearer to its boundary than this is a worry (common practice, no source)."""


def boundary_word(rating: Rating) -> str:
    """`dew point` or `bubble point`; empty for fluids without such a boundary."""
    return next((word for word in WORDS if any(f"{word} margin" in name for name in rating.quantities)), "")


def margin_table(rating: Rating) -> Table:
    """Margins in flow order: of beds at inlet and exit, of gaps after injection and as the stream leaves."""
    word = boundary_word(rating)
    if not word:
        return Table("", ())
    places = owners_in_flow_order(rating, word)
    kelvin = unit("temperature difference")
    return table(f"DISTANCE TO THE {word.upper()}, {kelvin}", [
        Column(("",), tuple(places), left=True),
        Column(("as it", "enters"), _cells(rating, places, f"inlet {word} margin")),
        Column(("after", "injection"), _cells(rating, places, f"{word} margin after injection")),
        Column(("as it", "leaves"), _leaving(rating, places, word)),
    ])  # fmt: skip


def owners_in_flow_order(rating: Rating, word: str) -> list[str]:
    """Owners that have such a margin, as the train meets them."""
    known = {name.partition(".")[0] for name in rating.quantities if f"{word} margin" in name}
    return [section.owner for section in rating.case.train if section.owner in known]


def _cells(rating: Rating, places: Sequence[str], word: str) -> tuple[str, ...]:
    """Margins with their marks; a stream that knows no such boundary says so."""
    cells = marked(values_of(rating, places, word), 1, signs_of(rating, places, word))
    return tuple(_without(rating, f"{place}.{word}", cell) for place, cell in zip(places, cells, strict=True))


def _without(rating: Rating, name: str, cell: str) -> str:
    known = rating.quantities.get(name)
    return NONE_THERE if known is not None and known.reason.endswith("at any temperature") else cell


def _leaving(rating: Rating, places: Sequence[str], word: str) -> tuple[str, ...]:
    """The exit of a bed, what a gap passes on."""
    beds = _cells(rating, places, f"exit {word} margin")
    gaps = _cells(rating, places, f"{word} margin")
    return tuple(
        bed if place.startswith("bed ") else gap for place, bed, gap in zip(places, beds, gaps, strict=True)
    )


def near_a_boundary(rating: Rating) -> str:
    """The sentence on the least margin where that is small or gone; else empty."""
    found = least_margin(rating)
    return least_margin_text(rating) if found is not None and found[0] < NEAR else ""


def least_margin_text(rating: Rating) -> str:
    """Where the fluid of the train is nearest to its boundary, in a sentence; empty without one."""
    word, found = boundary_word(rating), least_margin(rating)
    if found is None:
        return ""
    least, place = found
    if least < 0.0:
        return f"A second phase: {place} is {told(-least, 'temperature difference')} beyond its {word}."
    return f"Nearest to its {word}: {place}, by {told(least, 'temperature difference')}."


def least_margin(rating: Rating) -> tuple[float, str] | None:
    """The least margin in K and its place; None for fluids without a boundary."""
    word = boundary_word(rating)
    known = [
        (value.value, name.partition(".")[0])
        for name, value in rating.quantities.items()
        if word and f"{word} margin" in name and value.value is not None
    ]
    return min(known) if known else None
