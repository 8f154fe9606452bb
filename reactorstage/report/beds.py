"""The bed table: one row per bed, today's setting beside the new one."""

from __future__ import annotations

from collections.abc import Sequence

from reactorstage.report.display import difference_kind, places, shown, unit
from reactorstage.report.table import Column, Table, folded, marked, marks, plain, table
from reactorstage.train.forms import MEANINGLESS
from reactorstage.train.result import Rating

PEAK_SHOWN_K = 0.5
PAIR_WIDTH = 16


def bed_table(now: Rating, was: Rating | None = None) -> Table:
    """Beds in flow direction; ranks decide what a narrow screen leaves out."""
    beds = [profile.owner for profile in now.profiles]
    before = Before(was, beds)
    return table(
        "BEDS",
        [
            Column(("",), tuple(bed.removeprefix("bed ") for bed in beds)),
            _catalyst(now, beds),
            *_injections(now, before, beds),
            _ratio(now, beds),
            *paired(now, before, "inlet temperature", ("inlet", unit("temperature")), 1, ranks=(0, 2)),
            _quantity(now, beds, "exit temperature", ("exit", unit("temperature")), 1),
            before.column("exit temperature", ("exit", "was", unit("temperature")), 1, rank=16),
            _peak(now, beds),
            _quantity(now, beds, "rise", ("rise", unit("temperature difference")), 1, rank=1),
            _quantity(now, beds, "utilisation", ("of the", "possible", "rise %"), 0, rank=11),
            _quantity(now, beds, "depth at 90 % of rise", ("90 % of", "rise at", "depth %"), 0, rank=8),
            _approach(now, beds),
            _made(now, beds),
            _quantity(
                now, beds, "pressure drop", ("pressure", "drop", unit("pressure difference")), 2, rank=9
            ),
            _conversion(now, beds),
            _selectivity(now, beds),
            _quantity(now, beds, "inlet pressure", ("inlet", unit("pressure")), 2, rank=15),
            _quantity(now, beds, "catalyst activity", ("catalyst", "activity"), 2, rank=14, only_unlike=1.0),
        ],
    )


class Before:
    """The same quantities at today's setting, or nothing when there is none to compare with."""

    def __init__(self, rating: Rating | None, owners: Sequence[str]):
        self.rating = rating
        self.owners = owners

    def column(
        self, word: str, heading: tuple[str, ...], decimals: int, rank: int, group: tuple[str, ...] = ()
    ) -> Column | None:
        """A column without marks, with no more decimals than it needs."""
        if self.rating is None:
            return None
        values = values_of(self.rating, self.owners, word)
        decimals = decimals_of(self.rating, self.owners, word, decimals)
        return Column(heading, plain(values, decimals), rank, group)


def paired(
    now: Rating, before: Before, word: str, heading: tuple[str, ...], decimals: int, ranks: tuple[int, int]
) -> list[Column | None]:
    """A quantity now and, when there is something to compare with, as it was, under one heading."""
    if before.rating is None:
        return [_quantity(now, before.owners, word, heading, decimals, ranks[0])]
    group = (" ".join(heading),) if len(" ".join(heading)) <= PAIR_WIDTH else heading
    return [
        _quantity(now, before.owners, word, ("now",), decimals, ranks[0], group),
        before.column(word, ("was",), decimals, ranks[1], group),
    ]


def values_of(rating: Rating, owners: Sequence[str], word: str) -> list[float | None]:
    """Display values of `owner.word`, None where the quantity does not exist."""
    found = [rating.quantities.get(f"{owner}.{word}") for owner in owners]
    return [None if value is None else shown(value.value, value.kind) for value in found]


def signs_of(rating: Rating, owners: Sequence[str], word: str) -> list[str]:
    """Marks of `owner.word` for each owner."""
    found = marks(rating)
    return [found.get(f"{owner}.{word}", "") for owner in owners]


def _quantity(
    rating: Rating,
    beds: Sequence[str],
    word: str,
    heading: tuple[str, ...],
    decimals: int,
    rank: int = 0,
    group: tuple[str, ...] = (),
    only_unlike: float | None = None,
) -> Column | None:
    values = values_of(rating, beds, word)
    if only_unlike is not None and all(value == only_unlike for value in values):
        return None
    signs = signs_of(rating, beds, word)
    return Column(heading, marked(values, decimals_of(rating, beds, word, decimals), signs), rank, group)


def decimals_of(rating: Rating, owners: Sequence[str], word: str, wanted: int) -> int:
    """Decimals for `owner.word` in the unit that is shown, as fine as `wanted` in the trade unit."""
    known = (rating.quantities.get(f"{owner}.{word}") for owner in owners)
    return next((places(value.kind, wanted) for value in known if value is not None), wanted)


def _units_of(rating: Rating, owners: Sequence[str], word: str) -> tuple[str, ...]:
    kinds = {
        rating.quantities[name].kind for owner in owners if (name := f"{owner}.{word}") in rating.quantities
    }
    return (unit(kinds.pop()),) if kinds else ("",)


def injected_feeds(rating: Rating) -> list[str]:
    """Feeds that more than one bed takes, in the order in which the train meets them."""
    word = ".injected "
    takers: dict[str, int] = {}
    for name, value in rating.quantities.items():
        if word in name and value.value:
            feed = name.partition(word)[2]
            takers[feed] = takers.get(feed, 0) + 1
    return [feed for feed, count in takers.items() if count > 1]


def _catalyst(now: Rating, beds: Sequence[str]) -> Column:
    cells = plain(values_of(now, beds, "catalyst"), decimals_of(now, beds, "catalyst", 2))
    return Column(_units_of(now, beds, "catalyst"), cells, rank=3)


def _injections(now: Rating, before: Before, beds: Sequence[str]) -> list[Column | None]:
    columns: list[Column | None] = []
    for feed in injected_feeds(now):
        word = f"injected {feed}"
        columns += paired(now, before, word, (f"{feed} in", *_units_of(now, beds, word)), 1, ranks=(1, 4))
    return columns


def _ratio(now: Rating, beds: Sequence[str]) -> Column | None:
    above, below = ratio_species(now)
    if not (above and below):
        return None
    signs = signs_of(now, beds, f"inlet ratio {above}/{below}")
    flows = (values_of(now, beds, f"inlet flow of {species}") for species in (above, below))
    ratios = [_over(a, b) for a, b in zip(*flows, strict=True)]
    return Column((f"{above}/", below, "at inlet"), marked(ratios, 2, signs), rank=5)


def ratio_species(rating: Rating) -> tuple[str, str]:
    """The two species of the bed-inlet ratio: those that a limit names, else excess and main reactant."""
    word = ".inlet ratio "
    named = next((name.partition(word)[2] for name in rating.quantities if word in name), "")
    above, _, below = named.partition("/")
    return (above, below) if named else (rating.excess_reactant, rating.main_reactant)


def _over(above: float | None, below: float | None) -> float | None:
    """The ratio; None where nothing but rounding errors stands below."""
    if above is None or not below or below < MEANINGLESS * abs(above):
        return None
    return above / below


def _peak(now: Rating, beds: Sequence[str]) -> Column | None:
    peaks, exits = (values_of(now, beds, f"{word} temperature") for word in ("peak", "exit"))
    hotter = [
        peak if peak is not None and exit_ is not None and peak > exit_ + PEAK_SHOWN_K else None
        for peak, exit_ in zip(peaks, exits, strict=True)
    ]
    signs = [
        sign if peak is not None else ""
        for peak, sign in zip(hotter, signs_of(now, beds, "peak temperature"), strict=True)
    ]
    return Column(("peak", unit("temperature")), marked(hotter, 1, signs), rank=2)


def main_reaction(rating: Rating) -> str:
    """The first reaction with an equilibrium; empty when there is none."""
    word = ".approach to equilibrium of "
    known = {name.partition(word)[2] for name in rating.quantities if word in name}
    return next((reaction for reaction in rating.reactions if reaction in known), "")


def _approach(now: Rating, beds: Sequence[str]) -> Column | None:
    if not (reaction := main_reaction(now)):
        return None
    kind = difference_kind("temperature")
    word = f"approach to equilibrium of {reaction}"
    return _quantity(now, beds, word, ("from equi-", "librium", unit(kind)), 0, rank=7)


def _made(now: Rating, beds: Sequence[str]) -> Column | None:
    made = now.by_products[0] if now.by_products else now.product
    if not made:
        return None
    word = f"made {made}"
    if made == now.product:
        heading = (*folded(made), f"made, {_units_of(now, beds, word)[0]}")
    else:
        heading = (*folded(made), _units_of(now, beds, word)[0])
    return _quantity(now, beds, word, heading, 2, rank=6)


def _conversion(now: Rating, beds: Sequence[str]) -> Column | None:
    if not now.main_reactant:
        return None
    word = f"conversion of {now.main_reactant}"
    rank = 12 if injected_feeds(now) else 6
    return _quantity(now, beds, word, ("of", *folded(now.main_reactant), "gone %"), 1, rank=rank)


def _selectivity(now: Rating, beds: Sequence[str]) -> Column | None:
    if not (now.main_reactant and now.product and now.by_products):
        return None
    cells = [selectivity(now, bed) for bed in beds]
    return Column(("selec-", "tivity", "mol %"), plain(cells, 1), rank=13)


def selectivity(rating: Rating, owner: str) -> float | None:
    """Mol of product made in a bed or the train per 100 mol of the main reactant converted there."""
    made, gone = (values_of(rating, [owner], f"made {s}")[0] for s in (rating.product, rating.main_reactant))
    return 100.0 * made / -gone if made is not None and gone else None
