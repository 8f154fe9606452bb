"""What the result does not say, and room for those who check it."""

from __future__ import annotations

from reactorstage.report import bounds
from reactorstage.report.cautions import FULL, at_limits, substances
from reactorstage.report.page.parts import Listing, Section, Words
from reactorstage.report.page.subject import Subject


def cautions(subject: Subject) -> Section:
    """Every caution that belongs to this result."""
    rating = subject.now
    held = bounds.together(state for state in bounds.at_work(rating) if not state.implied)
    outside = [note for note in rating.notes if "outside the stated validity" in note]
    items = [*FULL, *at_limits(held), *outside, substances(list(rating.species))]
    sign = Words(
        "Checked by: ____________________   Date: ______________   Change request: ______________", "sign"
    )
    return Section("cautions", "Cautions", (Listing(tuple(items)), sign))
