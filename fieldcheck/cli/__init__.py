"""The command line: click groups, each body a few lines that call one function.

Results go to standard output, talk to standard error.  Exit 0: fine; 1: the check failed; 2: used wrongly.
"""

import os
import sys
from pathlib import Path

import click

from fieldcheck import __version__
from fieldcheck.engine.errors import FieldcheckError


class Commands(click.Group):
    """A group whose commands turn a FieldcheckError into one clear message and exit 2, never a traceback."""

    def invoke(self, ctx: click.Context) -> object:
        """Runs the command; what it refuses is said in the house's words."""
        try:
            return super().invoke(ctx)
        except FieldcheckError as error:
            click.echo(str(error), err=True)
            sys.exit(2)
        except BrokenPipeError:
            sys.exit(0)


@click.group(cls=Commands)
@click.version_option(__version__, prog_name="fieldcheck")
def main() -> None:
    """Guided checks of vintage low-voltage AC equipment, with a signed record at the end.

    Example: fieldcheck rules show contact-cleaning
    """


def data_folder(given: str | None) -> Path:
    """Where the workshop lives: --data, else FIELDCHECK_DATA, else ~/fieldcheck."""
    return Path(given or os.environ.get("FIELDCHECK_DATA") or Path.home() / "fieldcheck").expanduser()


data_option = click.option(
    "--data", metavar="DIR", help="The workshop's folder (else FIELDCHECK_DATA, else ~/fieldcheck)."
)
json_option = click.option("--json", "as_json", is_flag=True, help="Print the result as JSON.")


def _register() -> None:
    from fieldcheck.cli import jobs, numbers, records, rules, serve

    for module in (serve, rules, jobs, records, numbers):
        module.register(main)


_register()
