"""How the phone's files lie in their folder: hashed names, integrity, index.html, the web manifest."""

from __future__ import annotations

import base64
import hashlib
import json
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from translate import TranslationError

PAGE = """<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1, viewport-fit=cover">
<title>fieldcheck</title>
{{css}}
{{scripts}}
</head>
<body>
<noscript>fieldcheck needs JavaScript.</noscript>
</body>
</html>
"""


@dataclass(frozen=True)
class Manifest:
    """What a build made. files: path below the folder -> {"sha256": hex, "integrity": text, "bytes": n}."""

    version: str
    build: str
    chunks: dict[str, dict[str, Any]]
    files: dict[str, dict[str, Any]]
    translated: int = field(default=0, compare=False)


@dataclass
class Folder:
    """The folder being filled: writes files under hashed names and remembers them."""

    out: Path
    files: dict[str, dict[str, Any]] = field(default_factory=dict)

    def put(self, path: str, data: bytes) -> str:
        """Writes data at exactly this path."""
        target = self.out / path
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(data)
        digest = hashlib.sha256(data)
        integrity = "sha256-" + base64.b64encode(digest.digest()).decode()
        self.files[path] = {"sha256": digest.hexdigest(), "integrity": integrity, "bytes": len(data)}
        return path

    def put_hashed(self, name: str, data: bytes) -> str:
        """Writes data as a/<name>.<12 hex>.<ext>; returns that path."""
        stem, _, ext = name.rpartition(".")
        return self.put(f"a/{stem}.{hashlib.sha256(data).hexdigest()[:12]}.{ext}", data)


def build_number(folder: Folder, core: str) -> str:
    """12 hex digits that change with any file of the phone."""
    parts = [f"{path} {facts['sha256']}" for path, facts in sorted(folder.files.items())]
    return hashlib.sha256("\n".join([*parts, core]).encode()).hexdigest()[:12]


def put_web_manifest(folder: Folder, source: Path, icons: dict[str, str]) -> str:
    """Copies manifest.webmanifest with its icons' names replaced by the hashed ones; "" when there is none."""
    if not source.exists():
        return ""
    content = json.loads(source.read_text(encoding="utf-8"))
    for icon in content.get("icons", []):
        name = icon["src"].rpartition("/")[2]
        icon["src"] = icons[name].removeprefix("a/")  # relative to the manifest, which lies in a/ too
    return folder.put_hashed(source.name, json.dumps(content, ensure_ascii=False).encode())


def stylesheet_links(folder: Folder, paths: list[str], base: str) -> list[str]:
    return [f'<link rel="stylesheet" href="{base}{p}" integrity="{folder.files[p]["integrity"]}">' for p in paths]


def script_tags(folder: Folder, paths: list[str], base: str) -> list[str]:
    return [f'<script defer src="{base}{p}" integrity="{folder.files[p]["integrity"]}"></script>' for p in paths]


def icon_links(icons: dict[str, str], web_manifest: str, base: str) -> list[str]:
    """Links to the first SVG icon and to the web manifest, as far as there are any."""
    drawn = [f'<link rel="icon" type="image/svg+xml" href="{base}{p}">' for p in icons.values() if p.endswith(".svg")]
    return drawn[:1] + ([f'<link rel="manifest" href="{base}{web_manifest}">'] if web_manifest else [])


def page(template: Path, links: list[str], scripts: list[str]) -> str:
    """index.html: the template's {{css}} and {{scripts}} filled in."""
    text = template.read_text(encoding="utf-8") if template.exists() else PAGE
    for place, filling in (("{{css}}", links), ("{{scripts}}", scripts)):
        if text.count(place) != 1:
            raise TranslationError(f"webui/index.html must hold {place} once, not {text.count(place)} times")
        text = text.replace(place, "\n".join(filling))
    return text
