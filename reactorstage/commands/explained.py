"""The explanation on the terminal: a few lines under the money, and every table behind them when asked."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from reactorstage.commands.layout import INDENT, paragraph, table_lines
from reactorstage.report.aim import aim_of
from reactorstage.report.certificate import answers_table, certificate, certificate_text
from reactorstage.report.drivers import drivers_table, drivers_text
from reactorstage.report.flatness import flat_table, flat_text, left_alone_text
from reactorstage.report.moves import dropped_text, moves_table
from reactorstage.report.reach import pairs_text, reach_table
from reactorstage.report.table import Table
from reactorstage.report.understood import order_sentence, order_table
from reactorstage.train.result import Rating

if TYPE_CHECKING:
    from reactorstage.face import Optimisation


def explanation_texts(outcome: Optimisation, best: Rating) -> list[str]:
    """Flatness, why there are no moves, and drivers in a paragraph each."""
    optimum, aim = outcome.optimum, aim_of(best)
    texts = []
    if optimum.flatness is not None:
        flat = f"{flat_text(optimum.flatness, aim)} {left_alone_text(optimum.flatness, aim)}"
        texts.append(flat.strip())
    if optimum.moves is not None and optimum.moves.note:
        texts.append(f"MOVES        none: {optimum.moves.note}.")
    texts.append(drivers_text(outcome.influences, aim))
    return texts


def explained_lines(outcome: Optimisation, width: int) -> list[str]:
    """Every table of the explanation, with the certificate first."""
    optimum, best = outcome.optimum, outcome.best
    if best is None or optimum.conflict is not None:
        return []
    aim, numbers = aim_of(best), outcome.programme.numbers
    blocks: list[tuple[Table | None, str]] = [
        (
            answers_table(outcome.programme, optimum, (best, *outcome.others), aim),
            certificate_text(certificate(optimum), aim),
        ),
        (reach_table(optimum, best, aim), pairs_text(optimum.pairs, best, aim, len(optimum.pairs))),
    ]
    if optimum.flatness is not None:
        blocks.append((flat_table(optimum.flatness, aim), left_alone_text(optimum.flatness, aim)))
    if optimum.moves is not None:
        told = dropped_text(optimum.moves, numbers)
        blocks.append((moves_table(optimum.moves, numbers, outcome.today, aim), told))
    seen = outcome.programme.understanding()
    blocks.append((order_table(seen), order_sentence(seen)))
    blocks.append((drivers_table(outcome.influences, aim), ""))
    return [line for table, text in blocks for line in _block(table, text, width)]


def _block(table: Table | None, text: str, width: int) -> Sequence[str]:
    lines = [
        *(table_lines(table, width) if table is not None else []),
        *(paragraph(text, width, INDENT if text.startswith("TOGETHER") else 2) if text else []),
    ]
    return ["", *lines] if lines else []
