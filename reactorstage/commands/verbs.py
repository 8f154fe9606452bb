"""Click commands that help by example and end with the exit statuses of `errors`."""

from __future__ import annotations

import gc
import os
import sys
import traceback
from collections.abc import Sequence
from typing import Any, NoReturn

import click

from reactorstage.commands.console import tell
from reactorstage.errors import CallError, CaseProblems, ComputationError, ReactorstageError

DEFECT, WRONG_CALL, INTERRUPTED = ReactorstageError.exit_status, CallError.exit_status, 130
LIMITS_BROKEN, FAILED, POINTS_FAILED = 5, ComputationError.exit_status, 6
TRACE = "REACTORSTAGE_TRACE"


COLLECT_AFTER = 200_000
"""Objects made between two collections of garbage: a verb runs for seconds, collecting cost a tenth of it."""


class Helping(click.Command):
    """A command whose help begins with an example."""

    def __init__(self, *args: Any, example: str = "", **named: Any):
        super().__init__(*args, **named)
        self.example = example

    def format_help(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        formatter.write(f"Example: {self.example}\n\n")
        super().format_help(ctx, formatter)


class Verb(Helping):
    """One verb; its function returns an exit status or nothing."""


class Group(Helping, click.Group):
    """The verbs; running it ends the process with one of the documented statuses."""

    def main(self, args: Sequence[str] | None = None, prog_name: str | None = None, **named: Any) -> NoReturn:  # type: ignore[override]
        named["standalone_mode"] = False
        gc.set_threshold(COLLECT_AFTER)
        sys.exit(self._status(args, prog_name or "reactorstage", named))

    def _status(self, args: Sequence[str] | None, prog_name: str, named: dict[str, Any]) -> int:
        try:
            status = super().main(args, prog_name, **named)
            return status if isinstance(status, int) else 0
        except click.ClickException as error:
            error.show()
            return WRONG_CALL
        except (click.Abort, KeyboardInterrupt):
            return _stopped()
        except (CallError, CaseProblems, ComputationError) as error:
            tell(_said(error))
            return error.exit_status
        except Exception as error:
            return _stopped() if _interrupted(error) else _defect(error)


def _said(error: ReactorstageError) -> str:
    """Problems of a case as they are, with a count; other errors after the word error."""
    if not isinstance(error, CaseProblems):
        return f"error: {error}"
    count = len(error.problems)
    return f"{error}\n{count} error{'' if count == 1 else 's'} in the case; nothing was calculated"


def _stopped() -> int:
    tell("stopped by you; what was written before is kept")
    return INTERRUPTED


def _interrupted(error: BaseException | None) -> bool:
    """Whether Ctrl-C stands behind an error: libraries wrap it when it comes while they load."""
    while error is not None:
        if isinstance(error, KeyboardInterrupt):
            return True
        error = error.__cause__ or error.__context__
    return False


def _defect(error: Exception) -> int:
    if os.environ.get(TRACE) == "1":
        tell("".join(traceback.format_exception(error)).rstrip())
    what = " ".join(f"{type(error).__name__}: {error}".split())
    tell(f"this is a defect of reactorstage: {what} (set {TRACE}=1 to see where)")
    return DEFECT


def status_of(words: str) -> int:
    """The exit status for the status words of a result."""
    from reactorstage.optimiser import result

    return {
        result.INSIDE: 0,
        result.BROKEN: LIMITS_BROKEN,
        result.CANNOT: LIMITS_BROKEN,
        result.NO_ANSWER: FAILED,
        result.PARTLY: POINTS_FAILED,
        result.STOPPED: INTERRUPTED,
    }[words]
