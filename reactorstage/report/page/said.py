"""Lines of the terminal as sentences of the page: titles in capitals go or become words."""

from __future__ import annotations

import re

TITLE = re.compile(r"^([A-Z][A-Z ]{2,}[A-Z]) {2,}")
SPOKEN = {
    "EQUAL SPLIT": "An equal split",
    "POSSIBLE IF": "Possible if",
    "RELAXING": "Relaxing",
    "KEEP AWAY": "Margins are kept:",
}


def said(line: str) -> str:
    """A line without its title in capitals, or with that in words, as a sentence of its own."""
    found = TITLE.match(line)
    bare = line[found.end() :] if found else line
    if found and found[1] == "KEEP AWAY" and bare.startswith("none on"):
        return bare.replace("none on", "No margin is kept on", 1)
    if found and found[1] in SPOKEN:
        bare = f"{SPOKEN[found[1]]} {bare}"
    return bare[:1].upper() + bare[1:]
