"""`fieldcheck job list|show` and `fieldcheck journal verify|rebuild`."""

import json
import sys

import click

from fieldcheck.cli import data_folder, data_option, json_option
from fieldcheck.journal import projections, verify
from fieldcheck.journal.journal import Journal


@click.group()
def job() -> None:
    """Jobs of the workshop.

    Example: fieldcheck job list
    """


@job.command("list")
@data_option
@json_option
def list_jobs(data: str | None, as_json: bool) -> None:
    """List the jobs, newest last.

    Example: fieldcheck job list --json
    """
    rows = projections.rows(Journal.open(data_folder(data)), "job")
    if as_json:
        click.echo(json.dumps(rows, indent=2, ensure_ascii=False))
        return
    for row in rows:
        click.echo(f"{row['number']}  {row['state'] or 'open'}  {row['place'] or ''}  {row['reason'] or ''}".rstrip())


@job.command()
@click.argument("number")
@data_option
@json_option
def show(number: str, data: str | None, as_json: bool) -> None:
    """Show one job: items, limits as found and as left, outcome.

    Example: fieldcheck job show 2026-0001
    """
    from fieldcheck.cli import showing

    said = showing.job(Journal.open(data_folder(data)), number)
    click.echo(json.dumps(said, indent=2, ensure_ascii=False) if as_json else showing.text(said))


@click.group()
def journal() -> None:
    """The journal: what happened, append-only.

    Example: fieldcheck journal verify
    """


@journal.command("verify")
@data_option
def verify_journal(data: str | None) -> None:
    """Prove that nothing in the journal was altered, lost or put in. Exit 1 when something was.

    Example: fieldcheck journal verify --data ~/workshop
    """
    findings = verify.verify(data_folder(data))
    for sentence in findings:
        click.echo(sentence)
    if findings:
        sys.exit(1)
    click.echo("The journal is whole: every event, chain, signature and blob is as it was accepted.")


@journal.command()
@data_option
def rebuild(data: str | None) -> None:
    """Make the lists for search again from the events.

    Example: fieldcheck journal rebuild
    """
    count = projections.rebuild(Journal.open(data_folder(data)))
    click.echo(f"{count} events read")


def register(main: click.Group) -> None:
    """Adds this module's commands."""
    main.add_command(job)
    main.add_command(journal)
