"""What went in, and where the kinetics come from and hold."""

from __future__ import annotations

from reactorstage.report.display import fixed
from reactorstage.report.inputs import Given, given, text_of
from reactorstage.report.page.parts import Block, Grid, Section, Words
from reactorstage.report.page.subject import Subject
from reactorstage.report.table import Column, Table, table
from reactorstage.report.understood import understood_tables
from reactorstage.train.result import Rating

KINETIC = ("REACTIONS", "RATE LAWS", "K OF LAWS AGAINST GIBBS ENERGIES", "HEAT AND EQUILIBRIUM")
AS_GIVEN = (
    "Texts and units are those of the case file; what stands under every bed or every reaction is repeated "
    "where it counts. The last column gives file and line."
)


def inputs(subject: Subject) -> Section:
    """Every input with its unit as it was given and the place where it stands, then what was understood."""
    rows = given(subject.now.case)
    file = main_file(rows)
    made = table("INPUTS", [
        Column(("group",), tuple(row.group for row in rows), left=True),
        Column(("name",), tuple(row.name for row in rows), left=True),
        Column(("as given",), tuple(row.text for row in rows), left=True),
        Column(("where",), tuple(row.place.replace(f"{file}:", "line\u00a0") for row in rows), left=True),
    ])  # fmt: skip
    blocks: list[Block] = [
        Words(f"{AS_GIVEN} Lines without a file are those of {file}."),
        Grid(made, "Every input as given"),
    ]
    blocks += [
        Grid(one, f"As understood: {caption_of(one.title)}")
        for one in understood_tables(subject.seen)
        if one.title not in (*KINETIC, "LIMITS", "PRICES")
    ]
    return Section("inputs", "What went in", tuple(blocks))


def caption_of(title: str) -> str:
    """A title without its capitals; symbols and names in it stay as they are."""
    return " ".join(word.lower() if word.isupper() and len(word) > 1 else word for word in title.split(" "))


def upper(text: str) -> str:
    return text[:1].upper() + text[1:]


def main_file(rows: list[Given]) -> str:
    """The file in which most inputs stand."""
    files = [row.place.partition(":")[0] for row in rows]
    return max(files, key=files.count)


def kinetics(subject: Subject) -> Section:
    """Reactions, heats and constants, sources, and how much of each bed lies outside the stated window."""
    blocks: list[Block] = [
        Grid(one, upper(caption_of(one.title)))
        for one in understood_tables(subject.seen)
        if one.title in KINETIC
    ]
    blocks.append(Grid(sources_table(subject), "Source and validity of the kinetics"))
    blocks.append(Grid(species_table(subject), "Source of the species data"))
    blocks.append(
        Words("Kinetics hold only in the window in which they were measured; outside it a result is a guess.")
    )
    return Section("kinetics", "Kinetics: source and validity", tuple(blocks))


def sources_table(subject: Subject) -> Table:
    """Each reaction: source, window, share of each bed outside."""
    reactions = subject.now.case.resolved.get("reactions", {})
    names = list(subject.now.case.reactions)
    beds = [profile.owner for profile in subject.now.profiles]
    outside = [
        Column((f"{bed} outside",), tuple(_outside(subject.now, bed, name) for name in names)) for bed in beds
    ]
    return table("SOURCES", [
        Column(("",), tuple(names), left=True),
        Column(("source",), _texts(reactions, names, "source", "none stated"), left=True),
        Column(("valid",), _texts(reactions, names, "valid", "no window stated"), left=True),
        *outside,
    ])  # fmt: skip


def _texts(mapping: object, names: list[str], key: str, absent: str) -> tuple[str, ...]:
    return tuple(_said(mapping, name, key) or absent for name in names)


def _said(mapping: object, name: str, key: str) -> str:
    """A text of the case as given."""
    body = mapping.get(name) if isinstance(mapping, dict) else None
    return text_of(body[key]) if isinstance(body, dict) and body.get(key) is not None else ""


def _outside(rating: Rating, bed: str, reaction: str) -> str:
    value = rating.quantities.get(f"{bed}.outside validity of {reaction}")
    if value is None or value.value is None:
        return "-"
    return f"{fixed(100.0 * value.value, 0)} %"


def species_table(subject: Subject) -> Table:
    """Each species: where its data come from."""
    species = subject.now.case.resolved.get("species", {})
    names = list(subject.now.case.species)
    return table("SPECIES", [
        Column(("",), tuple(names), left=True),
        Column(("data",), tuple(_data(species, name) for name in names), left=True),
        Column(("source",), _texts(species, names, "source", "as the data file states"), left=True),
    ])  # fmt: skip


def _data(species: object, name: str) -> str:
    given_name = _said(species, name, "gas data")
    return f"gas data {given_name}" if given_name else "given in the case"
