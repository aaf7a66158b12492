"""python -m fieldcheck.rulebook check|show|schema|publish: what authors of rules need before anything else runs."""

import json
import sys
from pathlib import Path

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.rulebook import check, rules_folder, schema, show
from fieldcheck.rulebook.book import drafted
from fieldcheck.rulebook.findings import Findings
from fieldcheck.rulebook.published import publish

USE = "use: python -m fieldcheck.rulebook check [DIR] | show PROCEDURE [DIR] | schema | publish [DIR]"


def main(arguments: list[str]) -> int:
    """Exit code: 0 fine, 1 the check failed, 2 used wrongly."""
    command = arguments[0] if arguments else ""
    at = 2 if command == "show" else 1
    folder = Path(arguments[at]) if len(arguments) > at else rules_folder()
    if command == "check":
        findings, said = check(folder)
        for one in findings:
            print(one)
        print(f"{len(findings)} errors" if findings else said, file=sys.stderr if findings else sys.stdout)
        return 1 if findings else 0
    if command == "show" and len(arguments) > 1:
        print(show(arguments[1], folder))
        return 0
    if command == "schema":
        print(json.dumps(schema(), indent=2, ensure_ascii=False))
        return 0
    if command == "publish":
        findings, _ = check(folder)
        if findings:
            print(f"{len(findings)} errors: nothing is published", file=sys.stderr)
            return 1
        added = publish(folder, [one for _, one in drafted(folder, None, Findings()).procedures])
        print(f"{added} limit entries published")
        return 0
    print(USE, file=sys.stderr)
    return 2


if __name__ == "__main__":
    try:
        sys.exit(main(sys.argv[1:]))
    except FieldcheckError as error:
        print(error, file=sys.stderr)
        sys.exit(2)
