"""Conversion and heat against temperature."""

from __future__ import annotations

from reactorstage.report.cascade import cascades
from reactorstage.report.conversion import has_conversion
from reactorstage.report.heat import notes
from reactorstage.report.page.along import along
from reactorstage.report.page.diagrams import conversion_chart, heat_chart
from reactorstage.report.page.parts import Charts, Section, Words
from reactorstage.report.page.subject import Subject


def diagrams(subject: Subject) -> Section | None:
    """The way through the train over equilibrium; heat removed and added beside their levels."""
    what = along(subject)
    sides = cascades(subject.now)
    charts = [conversion_chart(what)] if what is not None and has_conversion(subject.now) else []
    charts += [heat_chart(sides, side) for side in sides]
    if not charts:
        return None
    said = notes(subject.now, sides)[:-1] if sides else []
    title = "Conversion and heat against temperature"
    return Section("diagrams", title, (Charts(tuple(charts)), *map(Words, said)))
