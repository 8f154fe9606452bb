"""`schema`: the JSON Schema of case files."""

from __future__ import annotations

import json

import click

from reactorstage.commands.console import say
from reactorstage.commands.verbs import Verb


@click.command(cls=Verb, example="reactorstage schema > case-schema.json")
def schema() -> None:
    """Print the JSON Schema of case files, for editors that complete and check YAML."""
    from reactorstage.case import json_schema

    say(json.dumps(json_schema(), indent=2, ensure_ascii=False))
