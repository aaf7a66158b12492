"""A small checkout with an app of the tests' own, so that these tests do not hang on what the screens are today."""

from __future__ import annotations

import shutil
from pathlib import Path

APP = '''"""The app of a test: it can be made to fail in every way that the error page must show."""

import sys

from browser import aio, document, html, window


class Faults:
    def write(self, text):
        window.fieldcheckFailed(text)

    def flush(self):
        pass


def divide(event):
    inner = 1
    return inner / 0


async def wait_and_divide():
    await window.Promise.resolve(1)
    return 1 / 0


def fail_later(event):
    aio.run(wait_and_divide())


def missing(event):
    __import__("app.nowhere")


async def show_screen():
    await window.platform.loadChunk("screens")
    from app.screens import one
    document <= html.P(one.TEXT, id="screen")


def ask_screen(event):
    aio.run(show_screen())


async def keep_text():
    text = "\\U0001f600 \\u202f \\u03a9 __proto__"
    await window.platform.putDraft("k", text)
    back = await window.platform.getDraft("k")
    digest = await window.platform.sha256(text)
    none = await window.platform.getDraft("nothing")
    count = await window.platform.withLock(locked)
    same = str(back == text) + " " + str(none == "")
    document <= html.P(same + " " + digest + " " + count, id="kept")


async def locked():
    return await window.platform.random(4)


def ask_keep(event):
    aio.run(keep_text())


def start():
    sys.stderr = Faults()
    document <= html.MAIN(html.H1("small phone"))
    for name, act in (("divide", divide), ("later", fail_later), ("missing", missing), ("ask", ask_screen),
                      ("keep", ask_keep)):
        key = html.BUTTON(name, id=name)
        key.bind("click", act)
        document <= key
'''


def make_small_repo(repo: Path, real: Path) -> Path:
    """Fills `repo` with the real build's parts and a small app; returns it."""
    (repo / "fieldcheck" / "engine" / "physics").mkdir(parents=True)
    for name in ("__init__.py", "engine/__init__.py", "engine/frozen.py", "engine/errors.py"):
        shutil.copy(real / "fieldcheck" / name, repo / "fieldcheck" / name)
    physics = repo / "fieldcheck" / "engine" / "physics"
    (physics / "__init__.py").write_text("")
    (physics / "registry.py").write_text('"""All of them."""\n')
    (physics / "windings.py").write_text('"""One."""\n\nCOPPER = 234.5\n')
    shutil.copytree(real / "webui" / "runtime", repo / "webui" / "runtime")
    shutil.copy(real / "webui" / "platform.js", repo / "webui" / "platform.js")
    app = repo / "webui" / "app"
    (app / "screens").mkdir(parents=True)
    (app / "main.py").write_text(APP)
    (app / "screens" / "one.py").write_text('from ..words import TEXT\n')
    (app / "words.py").write_text('TEXT = "screen one"\n')
    (repo / "webui" / "css").mkdir()
    (repo / "webui" / "css" / "look.css").write_text("main { color: #1B1D1F }\n")
    (repo / "webui" / "icons").mkdir()
    (repo / "webui" / "icons" / "mark.svg").write_text('<svg xmlns="http://www.w3.org/2000/svg"/>')
    (repo / "webui" / "manifest.webmanifest").write_text('{"name": "small", "icons": [{"src": "icons/mark.svg"}]}')
    return repo
