"""What sections are made of. Every text is plain and is escaped where it is written."""

from __future__ import annotations

from dataclasses import dataclass

from reactorstage.report.page.chart import Chart
from reactorstage.report.table import Table


@dataclass(frozen=True)
class Words:
    """A paragraph."""

    text: str
    kind: str = "words"


@dataclass(frozen=True)
class Listing:
    """Points, one below the other."""

    items: tuple[str, ...]
    kind: str = "listing"


@dataclass(frozen=True)
class Facts:
    """Pairs of a name and what is said of it; `loud` for those of the summary."""

    items: tuple[tuple[str, tuple[str, ...]], ...]
    loud: bool = False
    kind: str = "facts"


@dataclass(frozen=True)
class Grid:
    """A table with the words above and below it."""

    table: Table
    caption: str
    note: str = ""
    kind: str = "grid"


@dataclass(frozen=True)
class Charts:
    """Charts beside each other; `controls` puts read-out and switches above them."""

    charts: tuple[Chart, ...]
    controls: bool = False
    kind: str = "charts"


@dataclass(frozen=True)
class Folded:
    """A heading under which other blocks can be opened; open on paper."""

    title: str
    blocks: tuple[Block, ...]
    kind: str = "folded"


Block = Words | Listing | Facts | Grid | Charts | Folded


@dataclass(frozen=True)
class Section:
    """A part of the report: key is its place in the address, title its heading."""

    key: str
    title: str
    blocks: tuple[Block, ...]
