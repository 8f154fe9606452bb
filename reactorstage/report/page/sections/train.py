"""The train and its gaps in tables, and the money."""

from __future__ import annotations

from reactorstage.report import sentences
from reactorstage.report.accounts import Account, accounts, heat_words, signed
from reactorstage.report.beds import bed_table
from reactorstage.report.closures import exchanger_table, folds_table, recycle_table, states_table
from reactorstage.report.display import fixed, unit
from reactorstage.report.gaps import gap_table
from reactorstage.report.page.parts import Block, Grid, Section, Words
from reactorstage.report.page.subject import Subject
from reactorstage.report.phase import boundary_word, least_margin_text, margin_table
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating

EXCHANGED = "Heat passes from the hot stream to the cold one; differences are those at the two ends."
SLOPE = (
    "All of these satisfy the same inputs. Which one a plant is in depends on how it got there. Stable by "
    "its slope promises no more than that a small disturbance does not grow without swinging."
)
FOLD = "A size of 100 % is that of the exchanger as it stands."
BY_GIBBS = (
    "The possible rise follows the Gibbs energies of the species data; where a law has an equilibrium "
    "constant of its own, a bed can go beyond it."
)
MORE_THAN_ALL = 1.005
SIGNS = "* a limit holds this value; ! this value breaks a limit."


def train(subject: Subject) -> Section | None:
    """Beds, gaps and money; nothing where no bed was rated."""
    now, was = subject.now, subject.behind
    if not now.profiles:
        return None
    compared = " Now is this setting, was today's." if was is not None else ""
    blocks: list[Block] = [
        Grid(bed_table(now, was), "Beds in flow direction", f"{SIGNS}{compared}{beyond(now)}"),
    ]
    if text := sentences.out_line(now, was):
        blocks.append(Words(f"O{text[1:]}."))
    note = f"Heat removed is positive, heat added negative. Priced: {heat_words(now)}."
    gaps = gap_table(now, was)
    if gaps.rows:
        blocks.append(Grid(gaps, "Entry, gaps and effluent", note))
    blocks += [*closed(now), *phase(now)]
    rows = accounts(now, was)
    if len(rows) > 1 or any(row.now for row in rows):
        blocks.append(Grid(money_table(rows, subject.currency), "Money, cost positive"))
    return Section("train", "Train and gaps", tuple(blocks))


def beyond(rating: Rating) -> str:
    """What it means when a bed rises further than it could by the Gibbs energies; else empty."""
    used = [value.value for name, value in rating.quantities.items() if name.endswith(".utilisation")]
    return f" {BY_GIBBS}" if any(share is not None and share > MORE_THAN_ALL for share in used) else ""


def closed(rating: Rating) -> list[Block]:
    """Exchangers, recycles, every state of a closed train and where states vanish."""
    grids = [
        Grid(exchanger_table(rating), "Exchangers", EXCHANGED),
        Grid(recycle_table(rating), "Recycles"),
        Grid(states_table(rating.closed), "States at this setting", SLOPE),
        Grid(folds_table(rating.closed), "Folds: where two states meet and vanish", FOLD),
    ]
    return [one for one in grids if one.table.rows]


def phase(rating: Rating) -> list[Block]:
    """How far the streams are from a second phase."""
    made = margin_table(rating)
    if not made.rows:
        return []
    return [
        Grid(
            made,
            f"Distance to the {boundary_word(rating)}, {unit('temperature difference')}",
            least_margin_text(rating),
        )
    ]


def money_table(rows: list[Account], currency: str, other: str = "today") -> Table:
    """Accounts with those of another setting and the difference where there is one."""
    money = unit("money rate", currency)
    compared = any(row.was is not None for row in rows)
    old = tuple(fixed(row.was, 1) for row in rows)
    change = tuple("" if row.was is None else signed(row.now - row.was) for row in rows)
    return table("MONEY", [
        Column(("",), tuple(row.label for row in rows), left=True),
        Column((f"now, {money}",), tuple(fixed(row.now, 1) for row in rows)),
        Column((f"{other}, {money}",), old) if compared else None,
        Column(("change",), change) if compared else None,
    ])  # fmt: skip
