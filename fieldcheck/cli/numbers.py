"""`fieldcheck assess`, `functions` and `evaluate`: the engine without any server or journal."""

import json
import sys
from pathlib import Path
from typing import Any

import click

from fieldcheck import rulebook
from fieldcheck.cli import computing, json_option, runs
from fieldcheck.engine import assess as engine_assess
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.engine.physics.registry import REGISTRY


def read_json(path: str) -> Any:
    """The JSON of a file, or of standard input for "-"; FieldcheckError says where it is malformed."""
    try:
        text = sys.stdin.read() if path == "-" else Path(path).read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise FieldcheckError(f"cannot read {path}", "", str(error)) from error
    try:
        return json.loads(text)
    except json.JSONDecodeError as error:
        where = f"{path}:{error.lineno}"
        raise FieldcheckError(f"not JSON: {error.msg}", where, "compare with the template") from error


@click.command()
@click.argument("run", required=False)
@click.option("--template", metavar="PROCEDURE", help="Print a run of this procedure to fill in.")
@click.option("--schema", is_flag=True, help="Print the JSON Schema of a run.")
@json_option
def assess(run: str | None, template: str | None, schema: bool, as_json: bool) -> None:
    """Judge a filled-in run: procedure, nameplate, meters, readings as typed.

    Exit 1 when the readings allow less than serviceable.

    Example: fieldcheck assess --template contact-cleaning > run.json; fieldcheck assess run.json
    """
    if schema:
        click.echo(json.dumps(runs.run_schema(), indent=2))
        return
    if template:
        click.echo(json.dumps(runs.template(rulebook.part(template)), indent=2, ensure_ascii=False))
        return
    if not run:
        raise click.UsageError("name a run file, or ask for one with --template PROCEDURE")
    data = runs.checked_run(read_json(run))
    part = rulebook.part(data["procedure"])
    runs.check_against(part, data)
    data = runs.answered(data)
    said = engine_assess.assess(part, data)
    said["explanations"] = engine_assess.explanations(part, data)
    click.echo(json.dumps(said, indent=2, ensure_ascii=False) if as_json else runs.assessment_text(said))
    sys.exit(0 if said["outcome"] == "serviceable" else 1)


@click.command()
@click.argument("name", required=False)
@click.argument("arguments", nargs=-1, metavar="[KEY=VALUE ...]")
@json_option
def functions(name: str | None, arguments: tuple[str, ...], as_json: bool) -> None:
    """List the physics functions, describe one, or compute it.

    A value carries its unit and, after ±, its standard uncertainty. Lists are written with commas between values.

    Example: fieldcheck functions at_reference_temperature r=2.31±0.02ohm t=23.4degC t_ref=20degC k=234.5K
    """
    if name is None:
        click.echo(computing.function_list(as_json))
    elif not arguments:
        click.echo(computing.description(REGISTRY[name], as_json))
    else:
        click.echo(computing.computed(REGISTRY[name], arguments, as_json))


@click.command()
@click.argument("model")
@json_option
def evaluate(model: str, as_json: bool) -> None:
    """Evaluate a formula over quantities with uncertainty: value, u, degrees of freedom, U, budget.

    The model: {"formula": "V / I", "quantities": {"V": {"value": "5.007", "u": "0.003", "dof": "4"}, ...},
    "correlations": [["V", "I", "-0.36"]], "coverage": "95 %"}.

    Example: fieldcheck evaluate model.json --json
    """
    result = computing.evaluated(read_json(model))
    click.echo(json.dumps(result, indent=2, ensure_ascii=False) if as_json else computing.evaluation_text(result))


def register(main: click.Group) -> None:
    """Adds this module's commands."""
    for command in (assess, functions, evaluate):
        main.add_command(command)
