"""Every command says what it does, with an example that its own words allow, and stands in the README."""

import re
import shlex
from pathlib import Path

import click
import pytest
from commands import GOLDEN, golden_file, help_of, run, walk

README = Path(__file__).resolve().parents[2] / "README.md"
COMMANDS = dict(walk())
LEAVES = [name for name, command in COMMANDS.items() if not isinstance(command, click.Group)]


def examples(name: str) -> list[list[str]]:
    """The example's command lines as words; the help folds a long one."""
    text = " ".join(help_of(name).split("Example:")[1].split("Options:")[0].split("Commands:")[0].split())
    return [shlex.split(one.split(" > ")[0]) for one in text.split(";")]


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help_with_an_example(name):
    said = help_of(name)
    assert "Example: fieldcheck " in said
    assert len(said.split("Example:")[0].split("\n\n")[1].strip()) > 15, "a sentence on what it does"


@pytest.mark.parametrize("name", LEAVES)
def test_an_example_names_its_command_and_only_options_that_there_are(name):
    for words in examples(name):
        assert words[:len(name.split())] == name.split()
        known = {text for one in COMMANDS[name].params for text in one.opts}
        assert {one for one in words if one.startswith("--")} <= known


@pytest.mark.parametrize("name", LEAVES)
def test_every_option_says_what_it_is_for(name):
    for one in COMMANDS[name].params:
        if isinstance(one, click.Option):
            assert one.help, f"{name} {one.opts[0]}"


@pytest.mark.parametrize("name", LEAVES)
def test_the_readme_names_every_command(name):
    assert re.search(re.escape(name) + r"\b", README.read_text(encoding="utf-8"))


def test_the_readme_names_no_command_that_there_is_not():
    said = re.findall(r"`(fieldcheck [a-z][a-z ]*[a-z])", README.read_text(encoding="utf-8"))
    assert [one for one in said if one not in COMMANDS and one.rsplit(" ", 1)[0] not in COMMANDS] == []


@pytest.mark.parametrize("name", COMMANDS)
def test_the_help_is_as_it_was(name):
    """When a help has changed on purpose: python tests/cli/commands.py, then read the difference."""
    assert golden_file(name).exists(), "no golden help: run tests/cli/commands.py"
    assert help_of(name) == golden_file(name).read_text(encoding="utf-8")


def test_no_golden_help_is_left_over():
    assert {path.name for path in GOLDEN.glob("*.txt")} == {golden_file(name).name for name in COMMANDS}


def test_the_examples_of_numbers_run_as_they_stand():
    words = examples("fieldcheck functions")[0]
    result = run(*words[1:])
    assert result.exit_code == 0 and result.stderr == ""
    # IEC 60034-1 (checks 1.1) by hand: 2.31 * (234.5 + 20)/(234.5 + 23.4) = 2.27955, U = 1.96 * 0.02 * 0.98682 = 0.0387
    assert result.stdout.startswith("2.280 ± 0.039 Ω")


def test_the_version_is_that_of_the_package():
    from fieldcheck import __version__

    assert run("--version").stdout == f"fieldcheck, version {__version__}\n"
