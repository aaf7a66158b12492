"""The unsealed document: PDF/A-3b by an outside checker, reproducible, and closed to network and files."""

from __future__ import annotations

import http.server
import io
import subprocess
import sys
import threading
from collections.abc import Iterator
from datetime import datetime
from pathlib import Path

import pikepdf
import pikepdf.pdfa
import pytest
import sample_record as sample
from fontTools.ttLib import TTFont

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.records import typefaces
from fieldcheck.records.pdf import PACKAGE_ROOT, printable, render, uncovered


@pytest.fixture(scope="module")
def pdf() -> bytes:
    return render(sample.HTML, sample.CSS, sample.ATTACHMENTS, sample.WHEN, sample.assets())


def document(body: str) -> str:
    return f'<!doctype html><html lang="en"><head><title>t</title></head><body>{body}</body></html>'


def drawn(body: str, **assets: bytes) -> bytes:
    return render(document(body), "", [], sample.WHEN, assets)


def test_the_pdfa_checker_passes_it(pdf: bytes, tmp_path: Path) -> None:
    """ISO 19005-3 level b through pikepdf's checker: pictures with and without alpha, SVG, Greek, attachments."""
    path = tmp_path / "record.pdf"
    path.write_bytes(pdf)
    result = pikepdf.pdfa.validate_written(path, "3b")
    assert result.passed, result.findings
    with pikepdf.open(path) as file:
        pictures = [image for page in file.pages for image in page.images.values()]
        assert len(pictures) == 2
        assert not any(picture.get("/Interpolate", False) for picture in pictures)


def test_the_checker_would_notice_what_the_finisher_and_the_sheet_put_right(pdf: bytes, tmp_path: Path) -> None:
    path = tmp_path / "smooth.pdf"
    with pikepdf.open(io.BytesIO(pdf)) as file:
        for picture in file.pages[0].images.values():
            picture["/Interpolate"] = True
        file.save(path)
    result = pikepdf.pdfa.validate_written(path, "3b")
    assert not result.passed
    assert any("Interpolate" in str(finding) for finding in result.findings)


def test_only_the_bundled_faces_are_used_and_all_are_embedded(pdf: bytes, tmp_path: Path) -> None:
    (tmp_path / "record.pdf").write_bytes(pdf)
    said = subprocess.run(["pdffonts", "record.pdf"], capture_output=True, text=True, cwd=tmp_path, check=True).stdout
    lines = [line.split() for line in said.splitlines()[2:]]
    names = {line[0].split("+")[1] for line in lines}
    assert names == {"Roboto", "Roboto-Medium", "Roboto-Italic", "DejaVu-Sans"}
    assert all(line[-5:-2] == ["yes", "yes", "yes"] for line in lines)  # embedded, subset, with Unicode


def test_the_text_can_be_read_back(pdf: bytes, tmp_path: Path) -> None:
    (tmp_path / "record.pdf").write_bytes(pdf)
    command = ["pdftotext", "-layout", "record.pdf", "-"]
    text = subprocess.run(command, capture_output=True, text=True, cwd=tmp_path, check=True).stdout
    assert "U = 1.2 mΩ, τ = 90 s, Δϑ ≤ 30 K, ⌀ 4 mm, −5 °C" in text
    assert "page 1 of 1" in text


def test_attachments_come_back_byte_for_byte_and_are_listed_once(pdf: bytes, tmp_path: Path) -> None:
    (tmp_path / "record.pdf").write_bytes(pdf)
    for number, (name, content, _, _) in enumerate(sorted(sample.ATTACHMENTS), start=1):
        subprocess.run(
            ["pdfdetach", "-save", str(number), "-o", name, "record.pdf"], cwd=tmp_path, check=True, capture_output=True
        )
        assert (tmp_path / name).read_bytes() == content
    with pikepdf.open(tmp_path / "record.pdf") as file:
        listed = file.Root.AF
        assert [str(entry.UF) for entry in listed] == ["events.txt", "record.json"]
        assert [str(entry.EF.F.Subtype) for entry in listed] == ["/text/plain", "/application/json"]
        assert {str(entry.AFRelationship) for entry in listed} == {"/Data"}
        assert {str(entry.EF.F.Params.ModDate) for entry in listed} == {"D:20261201100000Z"}


def test_the_same_input_gives_the_same_bytes_whatever_the_machine_says(
    pdf: bytes, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("TZ", "America/New_York")
    monkeypatch.setenv("PYTHONHASHSEED", "7")
    monkeypatch.setenv("FONTCONFIG_FILE", "/etc/fonts/fonts.conf")
    assert render(sample.HTML, sample.CSS, sample.ATTACHMENTS[::-1], sample.WHEN, sample.assets()) == pdf


class Listener(http.server.BaseHTTPRequestHandler):
    hits: list[str] = []  # noqa: RUF012  # one list for all requests, as the server makes a handler for each

    def do_GET(self) -> None:
        self.hits.append(self.path)
        self.send_response(404)
        self.end_headers()


@pytest.fixture()
def address() -> Iterator[str]:
    server = http.server.HTTPServer(("127.0.0.1", 0), Listener)
    Listener.hits.clear()
    threading.Thread(target=server.serve_forever, daemon=True).start()
    yield f"http://127.0.0.1:{server.server_port}"
    server.shutdown()
    server.server_close()


@pytest.mark.parametrize(
    "body",
    [
        '<link rel="attachment" href="{}/a">',
        '<a rel="attachment" href="{}/a">x</a>',
        '<img src="{}/a" alt="a">',
        '<p style="background: url({}/a)">x</p>',
        '<style>@import "{}/a";</style>',
        '<object data="{}/a">x</object>',
        '<svg role="img" aria-label="a" width="9" height="9"><image href="{}/a" width="9" height="9"/></svg>',
    ],
)
def test_a_document_that_reaches_for_the_network_or_a_file_is_refused(body: str, address: str, tmp_path: Path) -> None:
    (tmp_path / "a").write_text("secret")
    for place in (address, f"file://{tmp_path}"):
        with pytest.raises(FieldcheckError, match="not among its assets"):
            drawn(body.format(place))
    assert Listener.hits == []


def test_a_picture_that_names_a_missing_asset_is_not_silently_left_out() -> None:
    with pytest.raises(FieldcheckError, match=r"asset:photo\.jpg"):
        drawn('<img src="asset:photo.jpg" alt="a">')


def test_a_picture_that_cannot_be_decoded_is_not_silently_left_out() -> None:
    with pytest.raises(FieldcheckError, match="cannot be drawn as written"):
        drawn('<img src="asset:p" alt="a">', p=sample.picture("JPEG")[:200])


def test_a_picture_of_too_many_pixels_is_refused() -> None:
    import zlib

    def chunk(kind: bytes, data: bytes) -> bytes:
        return len(data).to_bytes(4, "big") + kind + data + zlib.crc32(kind + data).to_bytes(4, "big")

    side = 8000  # 64 million pixels, of one bit each
    rows = zlib.compress(bytes((side // 8 + 1) * side))
    header = side.to_bytes(4, "big") * 2 + bytes([1, 0, 0, 0, 0])
    bomb = b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", header) + chunk(b"IDAT", rows) + chunk(b"IEND", b"")
    with pytest.raises(FieldcheckError, match="cannot be drawn as written"):
        drawn('<img src="asset:p" alt="a">', p=bomb)


def test_a_document_that_takes_too_long_or_nests_too_deeply_ends_in_a_sentence() -> None:
    with pytest.raises(FieldcheckError, match="too long to draw"):
        render(document("x"), "", [], sample.WHEN, {}, timeout_s=0.05)
    with pytest.raises(FieldcheckError, match="nested too deeply"):
        drawn("<div>" * 3000)


LOCKED = """
import pathlib, socket, subprocess, sys, tempfile
from fieldcheck.records.render import lock
lock([])
tried = [
    lambda: open("/etc/hostname"),
    lambda: open(sys.argv[1]),
    lambda: socket.create_connection(("127.0.0.1", 9)),
    lambda: socket.getaddrinfo("localhost", 80),
    lambda: subprocess.run(["true"]),
]
for attempt in tried:
    try:
        attempt()
    except PermissionError as error:
        print("refused" if "drawing a document" in str(error) else error)
    else:
        print("allowed")
with tempfile.TemporaryFile() as file:
    print("temporary file", file.write(b"x"))
"""


def test_the_second_lock_holds_without_the_first(tmp_path: Path) -> None:
    (tmp_path / "tmp").mkdir()
    outside = tmp_path / "secret"
    outside.write_text("x")
    done = subprocess.run(
        [sys.executable, "-c", LOCKED, str(outside)],
        capture_output=True,
        text=True,
        check=False,
        env={"PYTHONPATH": str(PACKAGE_ROOT), "TMPDIR": str(tmp_path / "tmp")},
    )
    assert done.stdout.splitlines() == ["refused"] * 5 + ["temporary file 1"], done.stderr


def test_a_machine_without_pango_gets_the_line_that_installs_it(monkeypatch: pytest.MonkeyPatch) -> None:
    from fieldcheck.records import render as child

    class NoPango:
        def find_spec(self, name: str, *_: object) -> None:
            if name == "weasyprint":
                raise OSError("cannot load library 'libgobject-2.0-0'")

    monkeypatch.delitem(sys.modules, "weasyprint", raising=False)
    monkeypatch.setattr(sys, "meta_path", [NoPango(), *sys.meta_path])
    with pytest.raises(FieldcheckError, match="Pango") as caught:
        child._weasyprint()
    assert caught.value.mend == "apt-get install -y --no-install-recommends libpangoft2-1.0-0 libharfbuzz-subset0"


def test_characters_that_no_face_draws_are_written_as_code_points() -> None:
    assert printable("Ω 2 µm ≤ ✓\n") == "Ω 2 µm ≤ ✓\n"
    assert printable("水") == "[U+6C34]"
    assert printable("\ud800") == "[U+D800]"
    assert printable("\U0001f9f0") == "[U+1F9F0]"
    assert printable("a\u202eb\x00") == "a[U+202E]b[U+0000]"
    assert uncovered("水 水a\x07") == ["\x07", "水"]
    with pytest.raises(FieldcheckError, match=r"no bundled face draws U\+6C34"):
        drawn("<p>&#x6C34;</p>")


def test_what_is_called_printable_has_a_glyph_in_a_bundled_font() -> None:
    """Against the cmaps as fontTools reads them, face by face, for a stretch of every block in use."""
    cmaps = [set(TTFont(typefaces.FOLDER / file, lazy=True).getBestCmap()) for _, _, _, file in typefaces.FACES]
    fallback = cmaps[3]
    for point in [*range(0x20, 0x530), *range(0x2000, 0x2800), *range(0x6C00, 0x6C40)]:
        if printable(chr(point)) == chr(point):
            assert point in fallback or all(point in cmap for cmap in cmaps[:3]) or point == 0xAD, hex(point)


def test_the_bundle_of_faces_stays_small_and_carries_its_licences() -> None:
    files = {path.name: path.stat().st_size for path in typefaces.FOLDER.iterdir()}
    assert sum(files.values()) <= 2_500_000
    assert "Apache License" in (typefaces.FOLDER / "Apache-2.0.txt").read_text()
    assert "Bitstream Vera" in (typefaces.FOLDER / "DejaVuSans-copyright.txt").read_text()


def test_what_the_caller_got_wrong_is_said() -> None:
    with pytest.raises(FieldcheckError, match="time zone"):
        render(document("x"), "", [], datetime(2026, 12, 1), {})
    with pytest.raises(FieldcheckError, match="two attachments have one name"):
        render(document("x"), "", [("a", b"", "", "text/plain")] * 2, sample.WHEN, {})
    with pytest.raises(FieldcheckError, match="not a media type"):
        render(document("x"), "", [("a", b"", "", "text plain")], sample.WHEN, {})
