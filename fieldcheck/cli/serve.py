"""`fieldcheck serve`."""

import click

from fieldcheck.cli import data_folder, data_option


@click.command()
@data_option
@click.option("--port", default=8470, show_default=True, help="Port on this machine.")
def serve(data: str | None, port: int) -> None:
    """Serve desk and phone on this machine only.

    Example: fieldcheck serve --data ~/workshop
    """
    from fieldcheck.desk.server import serve as serve_desk

    serve_desk(data_folder(data), port)


def register(main: click.Group) -> None:
    """Adds this module's commands."""
    main.add_command(serve)
