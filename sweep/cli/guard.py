"""From errors to messages and exit codes: no traceback for a user's mistake."""

from __future__ import annotations

import os
import sys
from typing import Any, NoReturn

import click

from sweep.errors import CrosswindError, InputFault

__all__ = ["COMPLETING", "guarded"]

COMPLETING = "_CROSSWIND_COMPLETE"
"""Set by a shell that asks for completions instead of a run."""


def guarded(group: click.Group, arguments: list[str] | None) -> Any:
    """Run a command group; leave with 2, 4, 5 or 130 and one clear message where it fails."""
    _refuse_foreign_package()
    try:
        code = group.main(
            args=arguments, prog_name="crosswind", complete_var=COMPLETING, standalone_mode=False
        )
    except click.ClickException as error:
        error.show()
        _leave(error.exit_code)
    except (click.Abort, KeyboardInterrupt):
        click.echo("Stopped.", err=True)
        _leave(130)
    except InputFault as error:
        _say_faults(error)
        _leave(error.exit_code)
    except CrosswindError as error:
        click.echo(str(error), err=True)
        _leave(error.exit_code)
    except SystemExit:
        if COMPLETING in os.environ:
            raise
        # The reader of our output went away, as head does; that is no fault of anybody's.
        _leave(0)
    except Exception as error:  # sorted by its own exit code, else re-raised
        known = _store_exit_code(error)
        if known is None:
            raise
        click.echo(str(error), err=True)
        _leave(known)
    _leave(code if isinstance(code, int) else 0)


def _say_faults(error: InputFault) -> None:
    count = len(error.faults)
    if count > 1:
        click.echo(f"{count} faults:", err=True)
    for fault in error.faults:
        click.echo(f"  {fault}" if count > 1 else str(fault), err=True)


def _store_exit_code(error: Exception) -> int | None:
    """Return the exit code of an error of the store, None for any other."""
    from store.errors import Ambiguous, NotFound, StoreError

    if isinstance(error, StoreError):
        return error.exit_code
    return 2 if isinstance(error, NotFound | Ambiguous) else None


def _refuse_foreign_package() -> None:
    """Say so when a file of the user's hides one of our packages."""
    import sweep

    if not hasattr(sweep, "__version__") or sweep.__file__ is None:
        click.echo("A file called sweep.py hides this program; rename your sweep.py.", err=True)
        _leave(2)


def _leave(code: int) -> NoReturn:
    sys.exit(code)
