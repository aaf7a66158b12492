"""The build of the phone: what it lays out, what it refuses, and that equal source gives equal bytes."""

from __future__ import annotations

import base64
import hashlib
import html.parser
import json
import re
import shutil
import time
from pathlib import Path

import build
import pytest
import translate
from hatchling.builders.hooks.plugin.interface import BuildHookInterface
from hatchling.plugin.utils import load_plugin_from_script
from small_phone import make_small_repo
from translate import Module, TranslationError

REPO = Path(__file__).resolve().parent.parent.parent


@pytest.fixture
def own_repo(tmp_path: Path) -> Path:
    """A small checkout that a test may spoil."""
    return make_small_repo(tmp_path / "own", REPO)


class Tags(html.parser.HTMLParser):
    """Start tags of a page, and the text inside scripts and styles."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.inline = ""
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))

    def handle_data(self, data: str) -> None:
        if self.tags and self.tags[-1][0] in ("script", "style"):
            self.inline += data.strip()


def test_every_file_is_named_by_its_content_and_listed(small_phone: Path) -> None:
    listed = json.loads((small_phone / "manifest.json").read_text())["files"]
    there = {p.relative_to(small_phone).as_posix() for p in small_phone.rglob("*") if p.is_file()}
    assert there == {*listed, "manifest.json"}
    for path, facts in listed.items():
        digest = hashlib.sha256((small_phone / path).read_bytes())
        assert facts["sha256"] == digest.hexdigest()
        assert facts["integrity"] == "sha256-" + base64.b64encode(digest.digest()).decode()
        if path != "index.html":
            assert re.fullmatch(rf"a/[\w.]+\.{digest.hexdigest()[:12]}\.\w+", path)


def test_the_page_holds_nothing_inline_and_every_file_has_its_integrity(small_phone: Path) -> None:
    listed = json.loads((small_phone / "manifest.json").read_text())["files"]
    page = Tags((small_phone / "index.html").read_text())
    assert page.inline == ""
    names = []
    for tag, attributes in page.tags:
        assert not [name for name in attributes if name.startswith("on") or name == "style"]
        if tag == "script" or attributes.get("rel") == "stylesheet":
            path = attributes.get("src") or attributes.get("href")
            assert path and attributes["integrity"] == listed[path]["integrity"]
            names.append(path.split("/")[1].split(".")[0])
    assert names == ["look", "brython", "loader", "platform", "core", "boot"]


def test_chunks_follow_the_table(small_phone: Path) -> None:
    chunks = json.loads((small_phone / "manifest.json").read_text())["chunks"]
    assert set(chunks) == {"core", "engine", "physics.windings", "screens"}
    core = next((small_phone / "a").glob("core.*.js")).read_text()
    engine = next((small_phone / "a").glob("engine.*.js")).read_text()
    assert '"fieldcheck.engine.physics.registry": {' in engine and '"fieldcheck.engine.errors": {' in core
    assert '"app.words": {' in core and '"app.screens.one": {' not in core
    assert chunks["screens"]["url"] in core and chunks["physics.windings"]["integrity"] in core


def test_icons_of_the_web_manifest_are_renamed(small_phone: Path) -> None:
    manifest = json.loads(next((small_phone / "a").glob("manifest.*.webmanifest")).read_text())
    assert (small_phone / "a" / manifest["icons"][0]["src"]).exists()


def test_equal_source_gives_equal_bytes_and_a_second_build_translates_nothing(own_repo: Path, tmp_path: Path) -> None:
    one = build.build(tmp_path / "one", own_repo, cache=tmp_path / "cache one")
    two = build.build(tmp_path / "two", own_repo, cache=tmp_path / "cache two")
    assert one == two and one.translated == two.translated > 5
    began = time.monotonic()
    again = build.build(tmp_path / "two", own_repo, cache=tmp_path / "cache two")
    assert again == one and again.translated == 0
    assert time.monotonic() - began < 2


def test_a_change_translates_one_module_and_changes_the_build_number(own_repo: Path, tmp_path: Path) -> None:
    before = build.build(tmp_path / "out", own_repo)
    (own_repo / "webui" / "app" / "words.py").write_text('TEXT = "another"\n')
    after = build.build(tmp_path / "out", own_repo)
    assert after.translated == 1 and after.build != before.build
    assert len(list((tmp_path / "out" / "a").glob("core.*.js"))) == 1  # nothing old is left behind
    boot = own_repo / "webui" / "runtime" / "boot.js"
    boot.write_text(boot.read_text() + "\n")
    assert build.build(tmp_path / "out", own_repo).build != after.build


@pytest.mark.parametrize(
    ("line", "named"),
    [
        ("import json", "json"),
        ("from dataclasses import dataclass", "dataclasses"),
        ("from browser import document, timer", "browser.document.timer"),
        ("import fieldcheck.journal", "fieldcheck.journal"),
        ("from ..engine import entry", "engine"),
        ("from . import nothing_here\nfrom .gone import x", "app.gone"),
    ],
)
def test_an_import_that_the_phone_cannot_carry_out_is_refused(own_repo: Path, line: str, named: str) -> None:
    (own_repo / "webui" / "app" / "bad.py").write_text("x = 1\n" + line + "\n")
    number = 2 + line.count("\n")
    with pytest.raises(TranslationError, match=rf"app/bad\.py:{number}: the phone has no module {named}\n"):
        build.build(own_repo / "webui" / "dist", own_repo)


@pytest.mark.parametrize(
    ("text", "named"),
    [
        ("from .screens import one", r"app\.screens\.one"),
        ("if True:\n    import app.screens.one", "app.screens.one"),
        ("from fieldcheck.engine.physics import windings", r"fieldcheck\.engine\.physics"),
    ],
)
def test_core_may_not_need_another_chunk_to_start(own_repo: Path, text: str, named: str) -> None:
    bad = own_repo / "webui" / "app" / "bad.py"
    bad.write_text(text + "\n")
    with pytest.raises(TranslationError, match=rf"app/bad\.py:\d: the start would need {named}, of the chunk"):
        build.build(own_repo / "webui" / "dist", own_repo)
    bad.write_text("def later():\n" + "\n".join("    " + line for line in text.split("\n")) + "\n")
    assert build.build(own_repo / "webui" / "dist", own_repo).translated > 0


def test_python_that_brython_refuses_names_its_file(tmp_path: Path) -> None:
    with translate.Translator(tmp_path) as translator, pytest.raises(TranslationError, match=r"^app/bad\.py: "):
        translator.function(Module("app.bad", "app/bad.py", "def f(:\n"))


def test_a_patch_whose_place_is_gone_or_doubled_stops_the_build() -> None:
    with pytest.raises(TranslationError, match="0 times, not once, the place of: a test"):
        translate.replaced_once("abc", "x", "y", "a test")
    with pytest.raises(TranslationError, match="2 times, not once, the place of: a test"):
        translate.replaced_once("xabcx", "x", "y", "a test")
    with pytest.raises(TranslationError, match="end before the start"):
        translate.cut_once("b a", "a", "b", "a test")
    assert translate.cut_once("1 a 2 b 3", "a", "b", "a test") == "1  3"


def test_another_brython_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(translate.importlib.metadata, "version", lambda name: "3.99")
    with pytest.raises(TranslationError, match=r"3\.99 is installed, but the patches were made for 3\.15\.0"):
        translate.brython_file("brython.js")


def test_docstrings_go_and_lines_stay() -> None:
    source = '"""Doc\nof it."""\nA = "µ"\n\n\ndef f():\n    """Only this."""\n\n\n'
    source += 'def g(x):\n    "two"  # why\n    return x\n'
    bare = translate.without_docstrings(source)
    assert "Doc" not in bare and "Only" not in bare and "two" not in bare
    assert bare.count("\n") == source.count("\n")
    names: dict[str, object] = {}
    exec(compile(bare, "bare", "exec"), names)
    assert names["f"].__code__.co_firstlineno == 6 and names["g"](3) == 3 and names["A"] == "µ"  # type: ignore[attr-defined, operator]


def test_no_shipped_file_names_this_machine(small_phone: Path, small_repo: Path) -> None:
    for path in small_phone.rglob("*.*"):
        text = path.read_text(encoding="utf-8")
        assert str(small_repo) not in text and "/tmp/" not in text and str(REPO) not in text


def test_a_template_without_its_places_is_refused(own_repo: Path) -> None:
    (own_repo / "webui" / "index.html").write_text("<!doctype html>{{css}}")
    with pytest.raises(TranslationError, match=r"must hold \{\{scripts\}\} once, not 0 times"):
        build.build(own_repo / "webui" / "dist", own_repo)


def test_a_folder_of_something_else_is_not_emptied(own_repo: Path, tmp_path: Path) -> None:
    (tmp_path / "letters").mkdir()
    (tmp_path / "letters" / "one.txt").write_text("keep")
    with pytest.raises(TranslationError, match="holds something else than a phone"):
        build.build(tmp_path / "letters", own_repo)
    assert (tmp_path / "letters" / "one.txt").read_text() == "keep"


def test_the_hook_puts_the_phone_into_the_wheel(own_repo: Path) -> None:
    """hatchling's build_data["force_include"] maps a path on disk to a path in the wheel.

    The script is loaded by hatchling's own means: it runs it without entering it into sys.modules.
    """
    script = str(REPO / "webui" / "build.py")
    hook_class = load_plugin_from_script(script, "webui/build.py", BuildHookInterface, "build_hook")
    hook = hook_class(str(own_repo), {}, None, None, "", "wheel")
    data: dict[str, dict[str, str]] = {"force_include": {}}
    hook.initialize("standard", data)
    assert list(data["force_include"].values()) == ["fieldcheck/_data/phone"]
    assert (Path(next(iter(data["force_include"]))) / "index.html").exists()
    shutil.rmtree(own_repo / "webui" / "dist")
    data = {"force_include": {}}
    hook.initialize("editable", data)
    assert data == {"force_include": {}} and (own_repo / "webui" / "dist" / "index.html").exists()


def test_the_command_says_what_is_wrong_without_a_traceback(
    own_repo: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sys.argv", ["build.py", "--out", str(own_repo / "out")])
    monkeypatch.setattr(build, "__file__", str(own_repo / "webui" / "build.py"))
    assert build.main() == 0 and re.match(r"phone 0\.\d+\.\d+ build [0-9a-f]{12}: ", capsys.readouterr().out)
    (own_repo / "webui" / "app" / "bad.py").write_text("import json\n")
    assert build.main() == 1 and capsys.readouterr().err.startswith("app/bad.py:1: the phone has no module json")
