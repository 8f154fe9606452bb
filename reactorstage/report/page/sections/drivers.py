"""What moves the answer: small steps of the numbers and constants of the case."""

from __future__ import annotations

from reactorstage.report.aim import aim_of
from reactorstage.report.drivers import drivers, drivers_table
from reactorstage.report.influence import FAINTEST, NOTE, says_something
from reactorstage.report.page.drivers import driver_chart
from reactorstage.report.page.parts import Charts, Folded, Grid, Section, Words
from reactorstage.report.page.subject import Subject

ON_CHART = 12
EVERY = 10_000


def influences(subject: Subject) -> Section | None:
    """A chart of the largest and a table of all; nothing for a rating or where no answer holds all limits."""
    found = () if subject.search is None else subject.search.influences
    if not says_something(found):
        return None
    aim, rows = aim_of(subject.now), drivers(found)
    drawn = [row for row in rows[:ON_CHART] if abs(row.change) > FAINTEST * abs(rows[0].change)]
    caption = f"Every parameter by what it does, {aim.heading}"
    blocks = (
        Words(f"{NOTE} Temperatures of heat levels and the size of vessels are not among them."),
        Charts((driver_chart(drawn, aim),)),
        Folded(caption, (Grid(drivers_table(found, aim, EVERY), caption),)),
    )
    return Section("drivers", "What moves the answer", blocks)
