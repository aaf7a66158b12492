"""`fieldcheck record make|verify`."""

import json
import sys
from datetime import UTC, datetime
from pathlib import Path

import click

from fieldcheck.cli import data_folder, data_option, json_option


@click.group()
def record() -> None:
    """Signed PDF records.

    Example: fieldcheck record verify R-2026-0001.pdf
    """


@record.command()
@click.argument("number")
@data_option
@click.option("--out", type=click.Path(path_type=Path), help="Where to write the PDF (else the workshop's folder).")
def make(number: str, data: str | None, out: Path | None) -> None:
    """Make the signed PDF of a signed job and print its path.

    Example: fieldcheck record make 2026-0001
    """
    from fieldcheck.records import make as making

    click.echo(str(making.for_job_number(data_folder(data), number, datetime.now(UTC), out)))


@record.command()
@click.argument("file", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("--root", type=click.Path(exists=True, dir_okay=False, path_type=Path),
              help="The workshop's records root (PEM) that you trust.")
@click.option("--against", type=click.Path(exists=True, dir_okay=False, path_type=Path),
              help="A later record: tells whether FILE was superseded by it.")
@json_option
def verify(file: Path, root: Path | None, against: Path | None, as_json: bool) -> None:
    """Verify a record from the file alone; one sentence says what is wrong. Exit 1 unless it is intact.

    Example: fieldcheck record verify R-2026-0001.pdf --root records-root.pem
    """
    from fieldcheck.records import verify as verifying

    said = verifying.verify(file.read_bytes(), root.read_bytes() if root else None,
                            against.read_bytes() if against else None)
    if as_json:
        click.echo(json.dumps(said.as_dict(), indent=2, ensure_ascii=False))
    else:
        click.echo(said.sentence)
        for line in said.details:
            click.echo("  " + line)
    sys.exit(0 if said.intact else 1)


def register(main: click.Group) -> None:
    """Adds this module's commands."""
    main.add_command(record)
