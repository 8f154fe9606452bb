"""The sections of the report in their order: a section is a function of the subject that may give nothing."""

from __future__ import annotations

from collections.abc import Callable

from reactorstage.report.page.parts import Section
from reactorstage.report.page.sections.basis import inputs, kinetics
from reactorstage.report.page.sections.cautions import cautions
from reactorstage.report.page.sections.certificate import certified
from reactorstage.report.page.sections.closure import closure
from reactorstage.report.page.sections.diagrams import diagrams
from reactorstage.report.page.sections.drivers import influences
from reactorstage.report.page.sections.flatness import flatness
from reactorstage.report.page.sections.limits import limits
from reactorstage.report.page.sections.moves import moves
from reactorstage.report.page.sections.profiles import profiles
from reactorstage.report.page.sections.reference import reference
from reactorstage.report.page.sections.summary import summary
from reactorstage.report.page.sections.train import train
from reactorstage.report.page.subject import Subject

SECTIONS: tuple[Callable[[Subject], Section | None], ...] = (
    summary,
    moves,
    limits,
    train,
    profiles,
    diagrams,
    flatness,
    influences,
    certified,
    reference,
    inputs,
    kinetics,
    closure,
    cautions,
)
