"""Loading and compiling: digests, parts, overlay, publishing, schema."""

import datetime
import hashlib
import json
import shutil
import tomllib
from pathlib import Path

import jsonschema
import pytest

from fieldcheck import rulebook
from fieldcheck.engine import texts
from fieldcheck.engine.errors import NotFound, RuleError
from fieldcheck.rulebook.__main__ import main

BASE = Path(__file__).parent.parent / "bad_rules" / "_base"
OWN = '''[[limit]]
procedure = "trial"
id = "contact"
[[limit.entry]]
since = 2026-02-01
at_most = "40 mohm"
cite = { source = "practice" }
tag = "WORKSHOP"
note = "Our track is longer."
'''


@pytest.fixture
def rules(tmp_path):
    """A copy of the small sound rulebook."""
    shutil.copytree(BASE, tmp_path / "rules")
    return tmp_path / "rules"


@pytest.fixture
def own(tmp_path):
    """A workshop's own limits."""
    (tmp_path / "own").mkdir()
    (tmp_path / "own" / "limits.toml").write_text(OWN)
    return tmp_path / "own"


def test_the_digest_is_that_of_the_index_and_the_index_names_each_part_by_its_digest(rules):
    book = rulebook.load(rules)
    assert book.digest == hashlib.sha256(book.index.encode()).hexdigest()
    named = [one["part"] for one in json.loads(book.index)["procedures"]]
    assert named == list(book.parts) == [hashlib.sha256(one.encode()).hexdigest() for one in book.parts.values()]


def test_loading_twice_gives_the_same_bytes(rules):
    assert rulebook.load(rules) == rulebook.load(rules)


def test_the_phones_reader_and_the_desks_read_a_part_alike(rules):
    for text in rulebook.load(rules).parts.values():
        assert texts.read(text, None) == json.loads(text)


def test_a_changed_word_changes_the_digest(rules):
    before = rulebook.load(rules).digest
    file = rules / "procedures" / "trial.toml"
    file.write_text(file.read_text().replace("Wipe.", "Wipe gently."))
    assert rulebook.load(rules).digest != before


def test_a_quantity_is_converted_exactly_and_its_text_is_kept(rules):
    limit = rulebook.part("trial", rules)["limits"][0]
    assert limit["entries"][0]["at_most"] == ["num", "0.05"]
    assert limit["entries"][0]["at_most_text"] == "50 mohm"


def test_a_workshops_own_limit_is_compiled_in_marked_and_changes_the_digest(rules, own):
    ours, theirs = rulebook.load(rules), rulebook.load(rules, own)
    assert ours.digest != theirs.digest
    (text,) = theirs.parts.values()
    limits = {one["id"]: one for one in json.loads(text)["limits"]}
    assert limits["contact"]["workshop"] and not limits["joint"]["workshop"]
    assert limits["contact"]["entries"][0]["at_most"] == ["num", "0.04"]
    assert limits["contact"]["entries"][0]["tag"] == "WORKSHOP"
    assert json.loads(theirs.index)["overlay"] == [{"procedure": "trial", "limit": "contact"}]


def test_our_files_are_not_touched_by_an_overlay(rules, own):
    before = {one: one.read_bytes() for one in rules.rglob("*.toml")}
    rulebook.load(rules, own)
    assert {one: one.read_bytes() for one in rules.rglob("*.toml")} == before


def test_a_rulebook_with_errors_is_not_loaded_and_all_of_them_are_told(rules):
    file = rules / "procedures" / "trial.toml"
    file.write_text(file.read_text().replace('at_most = "50 mohm"', 'at_most = "50 mV"').replace("tries = 2\n", ""))
    with pytest.raises(RuleError) as refused:
        rulebook.load(rules)
    assert "the rulebook has 2 errors" in str(refused.value)
    assert "cannot compare ohm with V" in refused.value.mend and "without end" in refused.value.mend


def test_an_unknown_procedure_is_answered_with_the_nearest(rules):
    with pytest.raises(NotFound) as refused:
        rulebook.part("trail", rules)
    assert refused.value.mend == 'did you mean "trial"?'


def test_publishing_remembers_each_dated_entry_once_and_then_guards_it(rules, capsys):
    assert main(["publish", str(rules)]) == 0
    assert capsys.readouterr().out == "2 limit entries published\n"
    assert main(["publish", str(rules)]) == 0
    assert capsys.readouterr().out == "0 limit entries published\n"
    file = rules / "procedures" / "trial.toml"
    file.write_text(file.read_text().replace('at_most = "20 mohm"', 'at_most = "21 mohm"'))
    assert main(["check", str(rules)]) == 1
    assert "overwrites what was published (at most 20 mohm" in capsys.readouterr().out


def test_a_later_entry_beside_the_published_one_is_the_way_to_change_a_limit(rules, capsys):
    main(["publish", str(rules)])
    file = rules / "procedures" / "trial.toml"
    file.write_text(file.read_text() + '[[limit.entry]]\nsince = 2026-07-01\nat_most = "15 mohm"\n'
                    'cite = { source = "practice" }\ntag = "PRACTICE"\n')
    assert main(["check", str(rules)]) == 0
    assert [one["since"] for one in rulebook.part("trial", rules)["limits"][1]["entries"]] == [
        "2026-01-01", "2026-07-01"]


def test_the_command_says_how_it_is_used_and_exits_2(capsys):
    assert main([]) == 2 and capsys.readouterr().err.startswith("use: python -m fieldcheck.rulebook check")


def as_json(data):
    """TOML data with its dates as texts, as an editor's validator sees them."""
    if isinstance(data, dict):
        return {key: as_json(one) for key, one in data.items()}
    if isinstance(data, list):
        return [as_json(one) for one in data]
    return data.isoformat() if isinstance(data, datetime.date) else data


@pytest.mark.parametrize("file", sorted(one for one in (rulebook.rules_folder() / "procedures").glob("*.toml")
                                        if not one.name.endswith(".cases.toml")), ids=lambda one: one.stem)
def test_the_json_schema_accepts_every_shipped_procedure(file):
    schema = rulebook.schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    jsonschema.validate(as_json(tomllib.loads(file.read_text())), schema)


def test_the_json_schema_refuses_an_unknown_key():
    data = as_json(tomllib.loads((BASE / "procedures" / "trial.toml").read_text()))
    data["limit"][0]["at_mots"] = "1 ohm"
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(data, rulebook.schema())
