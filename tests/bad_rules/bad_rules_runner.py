"""Puts a broken file of this folder over the sound rulebook in _base and checks the whole."""

import shutil
import tempfile
from pathlib import Path

from fieldcheck import rulebook

HERE = Path(__file__).parent
NOT_RULES = ("expected.txt", "removed.txt", "own")


def names() -> list[str]:
    """The broken rulebooks, one a folder."""
    return sorted(one.name for one in HERE.iterdir() if one.is_dir() and one.name[0] not in "_.")


def said(name: str) -> str:
    """All findings of one broken rulebook, a line each; own/ is laid over it as a workshop's own limits."""
    with tempfile.TemporaryDirectory() as place:
        rules = Path(place) / "rules"
        shutil.copytree(HERE / "_base", rules)
        for one in sorted((HERE / name).iterdir()):
            if one.name not in NOT_RULES:
                copy = shutil.copytree if one.is_dir() else shutil.copy
                copy(one, rules / one.name, **({"dirs_exist_ok": True} if one.is_dir() else {}))
        if (HERE / name / "removed.txt").exists():
            (rules / (HERE / name / "removed.txt").read_text().strip()).unlink()
        own = HERE / name / "own"
        if own.is_dir():
            shutil.copytree(own, Path(place) / "own")
        findings, _ = rulebook.check(rules, Path(place) / "own" if own.is_dir() else None)
        return "".join(str(one).replace(place + "/", "") + "\n" for one in findings)
