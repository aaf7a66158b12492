"""`fieldcheck rules check|show|schema`."""

import json
import sys
from pathlib import Path

import click

from fieldcheck import rulebook


@click.group()
def rules() -> None:
    """The rulebook: procedures and limits as data.

    Example: fieldcheck rules check rules
    """


@rules.command()
@click.argument("folder", required=False, type=click.Path(exists=True, file_okay=False, path_type=Path))
def check(folder: Path | None) -> None:
    """Check rule files and run their cases; all errors at once.

    Example: fieldcheck rules check rules
    """
    findings, checked = rulebook.check(folder or rulebook.rules_folder())
    for finding in findings:
        click.echo(str(finding))
    if findings:
        click.echo(f"{len(findings)} errors", err=True)
        sys.exit(1)
    click.echo(checked)


@rules.command()
@click.argument("procedure")
@click.option("--rules", "folder", metavar="DIR", type=click.Path(exists=True, file_okay=False, path_type=Path),
              help="Another folder of rules than the one that ships.")
def show(procedure: str, folder: Path | None) -> None:
    """Print a procedure as a senior technician would read it.

    Example: fieldcheck rules show contact-cleaning
    """
    click.echo(rulebook.show(procedure, folder or rulebook.rules_folder()))


@rules.command()
def schema() -> None:
    """Print the JSON Schema of a procedure file, for editors.

    Example: fieldcheck rules schema > procedure.schema.json
    """
    click.echo(json.dumps(rulebook.schema(), indent=2, ensure_ascii=False))


def register(main: click.Group) -> None:
    """Adds this module's commands."""
    main.add_command(rules)
