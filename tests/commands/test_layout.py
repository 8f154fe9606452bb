"""Tables and paragraphs in fixed columns."""

from __future__ import annotations

from reactorstage.commands.layout import fitting, items, paragraph, spread, table_lines
from reactorstage.report.table import Column, Table, table

NAME = Column(("",), ("1", "2"))
NOW = Column(("now",), ("364.0*", "397.9 "), group=("inlet degC",))
WAS = Column(("was",), ("384", "384"), rank=2, group=("inlet degC",))
NOTE = Column(("why",), ("unlit below", ""), rank=5, left=True)
BEDS = [
    "BEDS",
    "    inlet degC",
    "     now   was",
    "1  364.0*  384",
    "2  397.9   384",
]


def test_columns_stand_under_their_common_heading() -> None:
    assert table_lines(Table("BEDS", (NAME, NOW, WAS)), 80) == BEDS


def test_the_highest_rank_goes_first_when_room_is_short() -> None:
    assert fitting((NAME, NOW, WAS, NOTE), 100) == [NAME, NOW, WAS, NOTE]
    assert fitting((NAME, NOW, WAS, NOTE), 20) == [NAME, NOW, WAS]
    assert fitting((NAME, NOW, WAS, NOTE), 12) == [NAME, NOW]
    assert fitting((NAME, NOW, WAS, NOTE), 1) == [NAME, NOW]


def test_the_title_shares_the_first_line_when_there_is_room() -> None:
    wide = Column(("",), ("effluent",), left=True)
    value = Column(("from", "degC"), ("424.0",))
    assert table_lines(Table("GAPS", (wide, value)), 80)[0] == "GAPS       from"
    narrow = Column(("",), ("1",))
    assert table_lines(Table("GAPS", (narrow, value)), 80)[:2] == ["GAPS", "    from"]


def test_words_wrap_where_the_last_columns_are_too_wide() -> None:
    names = Column(("",), ("second ethylation", "x"), left=True)
    equations = Column(("equation",), ("ethylbenzene + ethylene <=> diethylbenzene", "a <=> b"), left=True)
    lines = table_lines(Table("REACTIONS", (names, equations, Column(("order",), ("1", "2")))), 50)
    assert max(map(len, lines)) <= 50
    assert lines[1:] == [
        "second ethylation  ethylbenzene + ethylene       1",
        "                   <=> diethylbenzene",
        "x                  a <=> b                       2",
    ]


def test_an_empty_table_has_no_lines() -> None:
    assert table_lines(table("LIMITS", [Column(("value",), ())]), 80) == []
    assert table("X", [NAME, None, Column(("gone",), ("-", ""))]).columns == (NAME,)


def test_parts_of_a_line_are_spread_or_broken() -> None:
    assert spread(["name", "status", "heat"], 80) == ["name        status        heat"]
    assert spread(["a" * 30, "b" * 30, "c" * 30], 70) == ["a" * 30 + " " * 8 + "b" * 30, "c" * 30]


def test_items_continue_under_an_indent() -> None:
    lines = items("MONEY EUR/h", ["by-product 1072.0", "heat 74.3", "total 1319.7"], 40)
    assert lines[0] == "MONEY EUR/h   by-product 1072.0"
    assert all(line.startswith(" " * 13) for line in lines[1:])
    assert "total 1319.7" in lines[-1]


def test_paragraphs_never_break_inside_a_word() -> None:
    lines = paragraph("1 the by-product of front-loaded beds is diethylbenzene", 20)
    assert all(len(line) <= 20 for line in lines)
    assert " ".join(" ".join(lines).split()) == "1 the by-product of front-loaded beds is diethylbenzene"


def test_equal_ranks_under_one_heading_go_together() -> None:
    pair = [Column((word,), ("1.0", "2.0"), rank=3, group=("rise, K",)) for word in ("first", "second")]
    assert fitting((NAME, *pair, NOTE), 17) == [NAME, *pair]
    assert fitting((NAME, *pair, NOTE), 10) == [NAME]
