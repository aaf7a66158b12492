"""The commands of fieldcheck as the click tree has them, and one way to run them without a process of their own."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

import click
from click.testing import CliRunner, Result

from fieldcheck.cli import main

GOLDEN = Path(__file__).resolve().parent.parent / "golden" / "help"


def walk(command: click.Command = main, name: str = "fieldcheck") -> Iterator[tuple[str, click.Command]]:
    """("fieldcheck rules check", command) of every command and group."""
    yield name, command
    if isinstance(command, click.Group):
        for key in sorted(command.commands):
            yield from walk(command.commands[key], f"{name} {key}")


def run(*arguments: str, given: str = "") -> Result:
    """Runs `fieldcheck ARGUMENTS`; standard output and error apart. An exception that is no exit is raised."""
    result = CliRunner().invoke(main, list(arguments), input=given, prog_name="fieldcheck")
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


def help_of(name: str) -> str:
    """The help of a command at a width of 80."""
    return CliRunner().invoke(main, [*name.split()[1:], "--help"], terminal_width=80, prog_name="fieldcheck").stdout


def golden_file(name: str) -> Path:
    return GOLDEN / (name.replace(" ", "-") + ".txt")


if __name__ == "__main__":  # writes the golden helps anew; read the difference before it is kept
    GOLDEN.mkdir(parents=True, exist_ok=True)
    for old in GOLDEN.glob("*.txt"):
        old.unlink()
    for one, _ in walk():
        golden_file(one).write_text(help_of(one), encoding="utf-8")
    sys.exit(0)
