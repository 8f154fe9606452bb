"""Profiles along the train with read-out and switches."""

from __future__ import annotations

from reactorstage.report.page.along import along
from reactorstage.report.page.parts import Charts, Section, Words
from reactorstage.report.page.profiles import profile_charts
from reactorstage.report.page.subject import Subject

USE = (
    "Point at a chart, or move the slider with the arrow keys, to read every chart at one place of the "
    "train; switch beds and today's setting on and off."
)


def profiles(subject: Subject) -> Section | None:
    """Charts along the train; nothing where no bed was rated."""
    what = along(subject)
    if what is None:
        return None
    charts = Charts(profile_charts(what), controls=True)
    return Section("profiles", "Profiles along the train", (Words(USE, "screen"), charts))
